package rpc

import (
	"bytes"
	"fmt"
	"io"
	"math/rand/v2"
	"runtime"
	"slices"
	"strings"
	"testing"
	"testing/iotest"
)

// framesOf reads a stream to its end: each body, each fault as "fault CODE
// (headerless)", and the error that ends it.
func framesOf(in io.Reader, limits Limits) []string {
	f := newFrameReader(in, limits.withDefaults())
	split := splitter{maxDepth: f.bodyBytes}
	var got []string
	for {
		body, fault, err := f.next()
		switch {
		case err != nil:
			return append(got, err.Error())
		case fault != nil && fault.headerless:
			got = append(got, "headerless")
		case fault != nil:
			got = append(got, fmt.Sprintf("fault %d", fault.Code))
		default:
			if _, fault := split.split(body); fault != nil && fault.Code == CodeParse {
				f.spoilt(body)
			}
			got = append(got, string(body))
		}
	}
}

// inPieces reads a text in pieces of random length.
func inPieces(text []byte, seed uint64) io.Reader {
	random := rand.New(rand.NewPCG(seed, 1))
	return &pieces{text, func() int { return 1 + random.IntN(1+random.IntN(200)) }}
}

type pieces struct {
	left []byte
	size func() int
}

func (p *pieces) Read(b []byte) (int, error) {
	if len(p.left) == 0 {
		return 0, io.EOF
	}
	n := copy(b, p.left[:min(len(p.left), p.size())])
	p.left = p.left[n:]
	return n, nil
}

func TestFrames(t *testing.T) {
	const end, cut = "EOF", "unexpected EOF"
	one := frame(`{"a":1}`)
	for _, test := range []struct {
		name, stream string
		want         []string
	}{
		{"nothing", "", []string{end}},
		{"two", one + frame("[]"), []string{`{"a":1}`, "[]", end}},
		{"lower case", "content-length: 2\r\n\r\n[]", []string{"[]", end}},
		{"upper case, no blank", "CONTENT-LENGTH:2\r\n\r\n[]", []string{"[]", end}},
		{"blanks about the colon and value", "Content-Length \t:\t 2 \t\r\n\r\n[]", []string{"[]", end}},
		{"leading zeros", "Content-Length: 0002\r\n\r\n[]", []string{"[]", end}},
		{"line feeds alone", "Content-Length: 2\n\n[]", []string{"[]", end}},
		{"other headers before and after", "X-Y: z\r\nContent-Length: 2\r\nContent-Type: a/b; charset=\"UTF-8\"\r\n\r\n[]", []string{"[]", end}},
		{"a continued header", "X: y\r\n z: w\r\nContent-Length: 2\r\n\r\n[]", []string{"[]", end}},
		{"the same length twice", "Content-Length: 2\r\nContent-Length: 02\r\n\r\n[]", []string{"[]", end}},
		{"blank lines between frames", one + "\r\n\n  \r\n" + one + "\n", []string{`{"a":1}`, `{"a":1}`, end}},
		{"another charset", "Content-Length: 2\r\nContent-Type: a; charset=utf-16\r\n\r\n[]" + one, []string{"fault -32700", `{"a":1}`, end}},
		{"different lengths", "Content-Length: 2\r\nContent-Length: 3\r\n\r\n[]" + one, []string{"fault -32700", `{"a":1}`, end}},
		{"no length", "Content-Type: a\r\n\r\n[]" + one, []string{"fault -32700", `{"a":1}`, end}},
		{"a length that is no number", "Content-Length: two\r\n\r\n[]" + one, []string{"fault -32700", `{"a":1}`, end}},
		{"a length below nothing", "Content-Length: -2\r\n\r\n[]" + one, []string{"fault -32700", `{"a":1}`, end}},
		{"a length with a sign", "Content-Length: +2\r\n\r\n[]" + one, []string{"fault -32700", `{"a":1}`, end}},
		{"a length with a unit", "Content-Length: 2 bytes\r\n\r\n[]" + one, []string{"fault -32700", `{"a":1}`, end}},
		{"an empty length", "Content-Length:\r\n\r\n[]" + one, []string{"fault -32700", `{"a":1}`, end}},
		{"an empty body", "Content-Length: 0\r\n\r\n" + one, []string{"", `{"a":1}`, end}},
		{"a line without a colon", "Content-Length: 2\r\nhello\r\n\r\n[]" + one, []string{"fault -32700", `{"a":1}`, end}},
		{"bare JSON", "{\"a\":1}\n{\"a\":2}\n" + one, []string{"headerless", `{"a":1}`, end}},
		{"bare JSON and no more", "{\"a\":1}", []string{"headerless", end}},
		{"words", "hello\n" + one, []string{"headerless", `{"a":1}`, end}},
		{"an HTTP request", "POST / HTTP/1.1\r\nHost: x\r\n\r\n", []string{"headerless", end}},
		{"a byte-order mark", "\xef\xbb\xbf" + one, []string{"headerless", `{"a":1}`, end}},
		{"zeros", "\x00\x00" + one, []string{"headerless", `{"a":1}`, end}},
		{"a header inside a word", "xyz" + one, []string{"fault -32700", `{"a":1}`, end}},
		{"a body shorter than announced", "Content-Length: 100\r\n\r\n{\"half" + one + one, []string{"fault -32700", `{"a":1}`, `{"a":1}`, end}},
		{"a body longer than announced", "Content-Length: 4\r\n\r\n{\"a\":1}" + one, []string{`{"a"`, `{"a":1}`, end}},
		{"a body that ends in the next header", "Content-Length: 12\r\n\r\n{\"a\":1}" + one, []string{`{"a":1}Conte`, `{"a":1}`, end}},
		{"a body that ends in the next header's number", "Content-Length: 24\r\n\r\n{\"a\":1}" + one, []string{`{"a":1}` + one[:17], `{"a":1}`, end}},
		{"a length counted in characters", "Content-Length: 7\r\n\r\n{\"é\":1}" + one, []string{"{\"é\":1", `{"a":1}`, end}},
		{"a body that looks like a header", frame("{\"Content-Length: 5\":\r\n\r\n\"content-length:5\"}") + one,
			[]string{"{\"Content-Length: 5\":\r\n\r\n\"content-length:5\"}", `{"a":1}`, end}},
		{"over the limit", "Content-Length: 101\r\n\r\n" + strings.Repeat("C", 101) + one, []string{"fault -32600", `{"a":1}`, end}},
		{"at the limit", frame(strings.Repeat(" ", 98) + "[]"), []string{strings.Repeat(" ", 98) + "[]", end}},
		{"over the limit and then another", "Content-Length: 99999999999999999999999\r\n\r\n{}" + one, []string{"fault -32600", `{"a":1}`, end}},
		{"over the limit and cut short", "Content-Length: 200\r\n\r\n{}", []string{"fault -32600", cut}},
		{"a long header", "X: " + strings.Repeat("y", 300) + "\r\n" + one, []string{"fault -32700", `{"a":1}`, end}},
		{"many headers", strings.Repeat("X: y\r\n", 60) + one, []string{"fault -32700", `{"a":1}`, end}},
		{"cut inside a name", one + "Cont", []string{`{"a":1}`, cut}},
		{"cut after the header", one + "Content-Length: 5\r\n\r\n", []string{`{"a":1}`, cut}},
		{"cut inside a body", one + "Content-Length: 5\r\n\r\n123", []string{`{"a":1}`, cut}},
	} {
		t.Run(test.name, func(t *testing.T) {
			limits := Limits{MessageBytes: 100, HeaderBytes: 200}
			check := func(how string, in io.Reader) {
				if got := framesOf(in, limits); !slices.Equal(got, test.want) {
					t.Errorf("%s\n got %q\nwant %q", how, got, test.want)
				}
			}
			check("as a whole", strings.NewReader(test.stream))
			check("byte by byte", iotest.OneByteReader(strings.NewReader(test.stream)))
			check("with the end in the last read", iotest.DataErrReader(strings.NewReader(test.stream)))
			for seed := range uint64(5) {
				check("in pieces", inPieces([]byte(test.stream), seed))
			}
			for i := range len(test.stream) {
				check(fmt.Sprintf("split at %d", i), io.MultiReader(strings.NewReader(test.stream[:i]), strings.NewReader(test.stream[i:])))
			}
		})
	}
}

func TestAFaultIsToldBeforeMoreInputComes(t *testing.T) {
	for _, stream := range []string{"{", "hello w", "Content-Length: x\n", "X: y\n\n", "Content-Length: 99\n\n{}Content-Length: 1\n"} {
		in, out := io.Pipe()
		go out.Write([]byte(stream)) // and then nothing: a reader that waits for more hangs here
		f := newFrameReader(in, DefaultLimits())
		if _, fault, err := f.next(); fault == nil || err != nil {
			t.Errorf("%q: fault %v, error %v", stream, fault, err)
		}
		out.Close()
	}
}

func TestMemoryGrowsWithWhatComesIn(t *testing.T) {
	for _, received := range []int{0, 100, 5_000, 300_000, 3_000_000} {
		stream := "Content-Length: 60000000\r\n\r\n" + strings.Repeat("1", received)
		f := newFrameReader(strings.NewReader(stream), DefaultLimits())
		var before, after runtime.MemStats
		runtime.ReadMemStats(&before)
		_, fault, err := f.next()
		runtime.ReadMemStats(&after)
		if fault != nil || err != io.ErrUnexpectedEOF {
			t.Fatalf("fault %v, error %v", fault, err)
		}
		// Each growth is fourfold, so all buffers together are at most 4/3 of the last.
		if took, most := after.TotalAlloc-before.TotalAlloc, uint64(8*received*4/3+2*frameBuffer); took > most {
			t.Errorf("after %d bytes of a long body %d bytes had been allocated, over %d", received, took, most)
		}
	}
}

func TestLongBodiesComeWhole(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 3))
	for _, length := range []int{4095, 4096, 4097, 65535, 65536, 65537, 262144, 1_000_003} {
		body := make([]byte, length)
		for i := range body {
			body[i] = byte('0' + random.IntN(10))
		}
		stream := append([]byte(frame(string(body))), frame("[]")...)
		got := framesOf(inPieces(stream, uint64(length)), Limits{})
		if len(got) != 3 || got[0] != string(body) || got[1] != "[]" {
			t.Errorf("a body of %d bytes came as %d parts", length, len(got))
		}
	}
}

func FuzzFrames(f *testing.F) {
	for _, s := range []string{"", "{", frame("{}"), frame("{}") + "x" + frame("[1]"), "Content-Length: 30\n\n{}" + frame("[]"), "content-length:2\r\nX: y\r\n\r\n[]",
		"Content-Length: 999999\r\n\r\n{}" + frame("[]"), "Content-Length: 1\r\nContent-Length: 2\r\n\r\n{}"} {
		f.Add([]byte(s), uint64(len(s)))
	}
	f.Fuzz(func(t *testing.T, stream []byte, seed uint64) {
		limits := Limits{MessageBytes: 1000, HeaderBytes: 100}
		whole := framesOf(bytes.NewReader(stream), limits)
		if pieces := framesOf(inPieces(stream, seed), limits); !slices.Equal(whole, pieces) {
			t.Fatalf("as a whole %q\nin pieces  %q", whole, pieces)
		}
		if single := framesOf(iotest.OneByteReader(bytes.NewReader(stream)), limits); !slices.Equal(whole, single) {
			t.Fatalf("as a whole   %q\nbyte by byte %q", whole, single)
		}
		// Framed rightly, any JSON text comes through, whatever it holds.
		var split splitter
		if _, fault := split.split(stream); len(stream) <= 1000 && (fault == nil || fault.Code != CodeParse) {
			got := framesOf(strings.NewReader(frame(string(stream))+frame("[]")), limits)
			if want := []string{string(stream), "[]", "EOF"}; !slices.Equal(got, want) {
				t.Fatalf("got %q, want %q", got, want)
			}
		}
	})
}
