package rpc

import (
	"encoding/json"
	"os"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"
)

// TestProtocolPage plays the frames of PROTOCOL.md, in their order, against one
// server, and holds the params of our own methods against their schemas.
func TestProtocolPage(t *testing.T) {
	const page = "PROTOCOL.md"
	text, err := os.ReadFile(page)
	if err != nil {
		t.Fatal(err)
	}
	books, err := filepath.EvalSymlinks(t.TempDir())
	if err != nil {
		t.Fatal(err)
	}
	write(t, filepath.Join(books, "handling.calculations.csv"), "work out,sample,> mean\nmean-interval,3; 5; 7; 9; 11,\nmean-interval,3; x,\n")
	// The page names the folder /books; a path of this machine may need escapes.
	here := strings.Trim(string(mustEncode(t, books)), `"`)
	c := begin(t, Options{Methods: Methods(), Version: "1.0.0", Limits: Limits{Workers: 4}, MayFill: []string{books}})
	schemas := paramSchemas(t)
	lines := strings.Split(strings.ReplaceAll(string(text), "\r\n", "\n"), "\n")
	playing, frames := false, 0
	for i, line := range lines {
		switch {
		case line == "```frames":
			playing = true
		case line == "```":
			playing = false
		case playing && strings.HasPrefix(line, "--> "):
			message := strings.TrimPrefix(line, "--> ")
			checkParams(t, schemas, message)
			c.raw(frame(strings.ReplaceAll(message, `"/books/`, `"`+here+separator(t))))
			frames++
		case playing && strings.HasPrefix(line, "<-- "):
			got := c.next()
			checkParams(t, schemas, got)
			got = strings.ReplaceAll(got, here+separator(t), "/books/")
			frames++
			if *update {
				lines[i] = "<-- " + got
			} else if line != "<-- "+got {
				t.Errorf("%s, line %d\n got %s\nwant %s\nrun: go test ./rpc -run Protocol -update", page, i+1, got, line[4:])
			}
		case playing:
			t.Errorf("%s, line %d is no frame: %s", page, i+1, line)
		}
	}
	c.ends(0)
	if frames < 25 {
		t.Errorf("%d frames were played", frames)
	}
	// The header shown is that of the first message.
	header := regexp.MustCompile(`Content-Length: (\d+)`).FindStringSubmatch(string(text))
	first := regexp.MustCompile(`(?m)^--> (.*)$`).FindStringSubmatch(string(text))
	if header == nil || first == nil || header[1] != strconv.Itoa(len(strings.TrimSuffix(first[1], "\r"))) {
		t.Errorf("the first message has %d bytes, the header shown says %v", len(first[1]), header)
	}
	if *update {
		if err := os.WriteFile(page, []byte(strings.Join(lines, "\n")), 0o644); err != nil {
			t.Fatal(err)
		}
	}
}

// PROTOCOL.md names every method of our own, every code of an error, and
// every member of a description.
func TestTheProtocolPageIsWhole(t *testing.T) {
	text, err := os.ReadFile("PROTOCOL.md")
	if err != nil {
		t.Fatal(err)
	}
	names := func(what, name string) {
		if !strings.Contains(string(text), name) {
			t.Errorf("PROTOCOL.md does not name %s %s", what, name)
		}
	}
	for _, m := range Methods() {
		if !m.Standard {
			names("the method", m.Name)
		}
	}
	for code := range knownCodes {
		names("the code", "| "+strconv.Itoa(code)+" |")
	}
	c := begin(t, Options{Methods: Methods()})
	open := func(request string) map[string]json.RawMessage {
		var reply struct {
			Result map[string]json.RawMessage
		}
		c.raw(frame(request))
		if err := json.Unmarshal([]byte(c.next()), &reply); err != nil || len(reply.Result) == 0 {
			t.Fatalf("%v: %s", err, request)
		}
		return reply.Result
	}
	open(`{"jsonrpc":"2.0","id":1,"method":"initialize","params":{"processId":null,"capabilities":{}}}`)
	for member := range open(`{"jsonrpc":"2.0","id":2,"method":"functions/describe","params":{"name":"outlier-check"}}`) {
		names("the member", "`"+member+"`")
	}
}

// separator is that of paths, as it stands in JSON.
func separator(t *testing.T) string {
	return strings.Trim(string(mustEncode(t, string(filepath.Separator))), `"`)
}

// paramSchemas gives the schema of each param of each of our own methods.
func paramSchemas(t *testing.T) map[string]map[string]json.RawMessage {
	t.Helper()
	type described struct {
		Name   string
		Params []struct {
			Name   string
			Schema json.RawMessage
		}
	}
	var table []*Method
	for _, m := range Methods() {
		table = append(table, &m)
	}
	var document struct {
		Methods []described
		Sent    []described `json:"x-notifications"`
	}
	if err := json.Unmarshal(mustEncode(t, openRPC(table)), &document); err != nil {
		t.Fatal(err)
	}
	out := map[string]map[string]json.RawMessage{}
	for _, m := range append(document.Methods, document.Sent...) {
		out[m.Name] = map[string]json.RawMessage{}
		for _, p := range m.Params {
			out[m.Name][p.Name] = p.Schema
		}
	}
	return out
}

// checkParams holds the params of a message against the schemas of its method.
func checkParams(t *testing.T, schemas map[string]map[string]json.RawMessage, message string) {
	t.Helper()
	var m struct {
		Method string
		Params map[string]json.RawMessage
	}
	if err := json.Unmarshal([]byte(message), &m); err != nil {
		t.Fatalf("%v: %s", err, message)
	}
	of, ours := schemas[m.Method]
	for name, value := range m.Params {
		if schema, known := of[name]; known {
			validate(t, schema, value)
		} else if ours {
			t.Errorf("%s has no param %s: %s", m.Method, name, message)
		}
	}
}
