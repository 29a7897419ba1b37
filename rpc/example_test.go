package rpc_test

import (
	"context"
	"fmt"
	"io"
	"os"
	"regexp"
	"strings"
	"testing"

	"halfwidth/rpc"
)

// A whole session: begin, one question, end.
func ExampleServe() {
	var in strings.Builder
	for _, body := range []string{
		`{"jsonrpc":"2.0","id":1,"method":"initialize","params":{"processId":null,"capabilities":{}}}`,
		`{"jsonrpc":"2.0","method":"initialized","params":{}}`,
		`{"jsonrpc":"2.0","id":2,"method":"functions/answer","params":{"name":"standard-score","arguments":{"value":12,"mean":10,"sd":2}}}`,
		`{"jsonrpc":"2.0","id":3,"method":"shutdown"}`,
		`{"jsonrpc":"2.0","method":"exit"}`,
	} {
		fmt.Fprintf(&in, "Content-Length: %d\r\n\r\n%s", len(body), body)
	}
	var out strings.Builder
	code := rpc.Serve(context.Background(), strings.NewReader(in.String()), &out, os.Stderr, rpc.Options{})
	// (12 - 10)/2 is 1.
	fmt.Println(code, strings.Count(out.String(), "Content-Length: "), strings.Contains(out.String(), `"score":1,`))
	// Output: 0 3 true
}

// The request that the README shows is framed rightly and answered.
func TestTheFrameOfTheReadme(t *testing.T) {
	text, err := os.ReadFile("../README.md")
	if err != nil {
		t.Fatal(err)
	}
	shown := regexp.MustCompile(`    Content-Length: (\d+)\r?\n\r?\n    (\{.*\})`).FindStringSubmatch(string(text))
	if shown == nil {
		t.Fatal("the README shows no frame")
	}
	if length := fmt.Sprint(len(shown[2])); shown[1] != length {
		t.Errorf("its length is %s, the README says %s", length, shown[1])
	}
	const begin = `{"jsonrpc":"2.0","id":1,"method":"initialize","params":{"processId":null,"capabilities":{}}}`
	in := fmt.Sprintf("Content-Length: %d\r\n\r\n%sContent-Length: %s\r\n\r\n%s", len(begin), begin, shown[1], shown[2])
	var out strings.Builder
	rpc.Serve(t.Context(), strings.NewReader(in), &out, io.Discard, rpc.Options{})
	// (12.1 + 11.8 + 12.6)/3 is 12.1666…
	if _, reply, found := strings.Cut(out.String(), `"id":2,"result":`); !found || !strings.Contains(reply, `"mean":12.16666666666666`) {
		t.Errorf("it is answered by %s", out.String())
	}
}
