package rpc

import (
	"encoding/json"
	"strings"
	"testing"
	"unicode/utf8"
)

func TestEnvelopes(t *testing.T) {
	for _, test := range []struct {
		body   string
		id     string
		method string
		params string
		code   int
		text   string // part of the message
	}{
		{`{"jsonrpc":"2.0","id":1,"method":"m","params":{"a":[1 , 2]}}`, `1`, "m", `{"a":[1 , 2]}`, 0, ""},
		{` { "params" : [ ] , "method" : "m" , "id" : "x" , "jsonrpc" : "2.0" } ` + "\r\n", `"x"`, "m", `[ ]`, 0, ""},
		{`{"jsonrpc":"2.0","method":"m"}`, "", "m", "", 0, ""},
		{`{"jsonrpc":"2.0","id":null,"method":"m","params":null}`, "null", "m", "", 0, ""},
		{`{"jsonrpc":"2.0","id":-1,"method":"m"}`, "-1", "m", "", 0, ""},
		{`{"jsonrpc":"2.0","id":1.50e+3,"method":"m"}`, "1.50e+3", "m", "", 0, ""},
		{`{"jsonrpc":"2.0","id":123456789012345678901234567890,"method":"m"}`, "123456789012345678901234567890", "m", "", 0, ""},
		{`{"jsonrpc":"2.0","id":"\ud800\u0041","method":"m\u002fn"}`, `"\ud800\u0041"`, "m/n", "", 0, ""},
		{`{"json\u0072pc":"2\u002e0","i\u0064":7,"method":"m"}`, "7", "m", "", 0, ""},
		{`{"jsonrpc":"2.0","id":1,"method":"m","extra":{"deep":[[[]]]},"Params":1}`, "1", "m", "", 0, ""},

		{`{"jsonrpc":"2.0","id":true,"method":"m"}`, "", "", "", CodeInvalidRequest, "a text or a number"},
		{`{"jsonrpc":"2.0","id":[1],"method":"m"}`, "", "", "", CodeInvalidRequest, "a text or a number"},
		{`{"jsonrpc":"2.0","id":{},"method":"m"}`, "", "", "", CodeInvalidRequest, "a text or a number"},
		{`{"jsonrpc":"1.0","id":1,"method":"m"}`, "1", "", "", CodeInvalidRequest, `is not "2.0"`},
		{`{"jsonrpc":2.0,"id":1,"method":"m"}`, "1", "", "", CodeInvalidRequest, `is not "2.0"`},
		{`{"id":1,"method":"m"}`, "1", "", "", CodeInvalidRequest, `write "jsonrpc": "2.0"`},
		{`{"jsonrpc":"2.0","id":1}`, "1", "", "", CodeInvalidRequest, `"method" is missing`},
		{`{"jsonrpc":"2.0","id":1,"Method":"m"}`, "1", "", "", CodeInvalidRequest, `"method" is missing`},
		{`{"jsonrpc":"2.0","id":1,"method":1}`, "1", "", "", CodeInvalidRequest, "a text"},
		{`{"jsonrpc":"2.0","id":1,"method":null}`, "1", "", "", CodeInvalidRequest, "a text"},
		{`{"jsonrpc":"2.0","id":1,"method":"m","params":"bar"}`, "1", "", "", CodeInvalidRequest, "params"},
		{`{"jsonrpc":"2.0","id":1,"method":"m","params":0}`, "1", "", "", CodeInvalidRequest, "params"},
		{`{"jsonrpc":"2.0","id":1,"method":"m","result":0}`, "1", "", "", CodeInvalidRequest, "neither result nor error"},
		{`{"jsonrpc":"2.0","id":1,"id":1,"method":"m"}`, "", "", "", CodeInvalidRequest, `"id" is given twice`},
		{`{"jsonrpc":"2.0","id":1,"method":"m","method":"n"}`, "1", "", "", CodeInvalidRequest, `"method" is given twice`},
		{`{}`, "", "", "", CodeInvalidRequest, "jsonrpc"},
		{`[]`, "", "", "", CodeInvalidRequest, "batch"},
		{`[{"jsonrpc":"2.0","id":1,"method":"m"}]`, "", "", "", CodeInvalidRequest, "batch"},
		{`7`, "", "", "", CodeInvalidRequest, "object"},
		{`"text"`, "", "", "", CodeInvalidRequest, "object"},
		{`null`, "", "", "", CodeInvalidRequest, "object"},
		{`{"jsonrpc":"2.0","id":5,"method":"m","params":` + strings.Repeat("[", 9) + strings.Repeat("]", 9) + `}`, "5", "m", strings.Repeat("[", 9) + strings.Repeat("]", 9), 0, ""},
		{`{"params":` + strings.Repeat("[", 10) + strings.Repeat("]", 10) + `,"jsonrpc":"2.0","id":5,"method":"m"}`, "5", "", "", CodeInvalidRequest, "nested 11 deep; at most 10"},
		{strings.Repeat("[", 100_000) + strings.Repeat("]", 100_000), "", "", "", CodeInvalidRequest, "batch"},

		{``, "", "", "", CodeParse, "empty"},
		{"  \n", "", "", "", CodeParse, "empty"},
		{`{"jsonrpc":"2.0","id":1,"method":"m"`, "", "", "", CodeParse, "at byte 36 stands the end"},
		{`{"jsonrpc":"2.0","id":1,"method":"m"}}`, "", "", "", CodeParse, "the end of the message"},
		{`{"jsonrpc":"2.0","id":1,"method":"m"} {}`, "", "", "", CodeParse, "the end of the message"},
		{`{"jsonrpc":"2.0","id":1,"method":"m",}`, "", "", "", CodeParse, "name"},
		{`{"jsonrpc":"2.0","id":1,"method":'m'}`, "", "", "", CodeParse, "a value"},
		{`{"id":01,"method":"m"}`, "", "", "", CodeParse, "comma"},
		{`{"id":+1}`, "", "", "", CodeParse, "a value"},
		{`{"id":.5}`, "", "", "", CodeParse, "a value"},
		{`{"id":1.}`, "", "", "", CodeParse, "a digit"},
		{`{"id":1e}`, "", "", "", CodeParse, "a digit"},
		{`{"a":NaN}`, "", "", "", CodeParse, "a value"},
		{`{"a":nul}`, "", "", "", CodeParse, "null"},
		{"{\"a\":\"x\ny\"}", "", "", "", CodeParse, "control character"},
		{`{"a":"\x"}`, "", "", "", CodeParse, "an escape"},
		{`{"a":"\u12g4"}`, "", "", "", CodeParse, "hexadecimal"},
		{"{\"a\":\"\xff\"}", "", "", "", CodeParse, "byte 6 is not UTF-8"},
		{"{\"a\":\"\xed\xa0\x80\"}", "", "", "", CodeParse, "not UTF-8"},
		{strings.Repeat("[", 100_000), "", "", "", CodeParse, "the end"},
	} {
		s := splitter{maxDepth: 10}
		e, fault := s.split([]byte(test.body))
		name := test.body[:min(len(test.body), 80)]
		if string(e.id) != test.id {
			t.Errorf("%s: id %q, want %q", name, e.id, test.id)
		}
		if fault == nil {
			fault = &Error{}
		} else {
			e.method, e.params = "", nil
		}
		if fault.Code != test.code || !strings.Contains(fault.Message, test.text) {
			t.Errorf("%s: %d %q, want %d with %q", name, fault.Code, fault.Message, test.code, test.text)
		}
		if e.method != test.method || string(e.params) != test.params {
			t.Errorf("%s: method %q with %s, want %q with %s", name, e.method, e.params, test.method, test.params)
		}
	}
}

// FuzzEnvelope holds the splitter against encoding/json: what the one takes for
// JSON the other does, and each member is the same.
func FuzzEnvelope(f *testing.F) {
	for _, s := range []string{`{"jsonrpc":"2.0","id":1,"method":"m","params":{"a":[1,2.5e-3,null,true,"x\u00e9\\"]}}`, `[]`, `{"a":{}}`, `"\ud83d\ude00"`, ` {"id" : "\n"} `,
		`{"i\u0064":-0.0}`, "\ufeff{}", `{"result":null}`, `{"error":{"code":1,"message":"m"},"id":3}`, `[[[{"":[]}]]]`, `1E+5`, `-`} {
		f.Add([]byte(s))
	}
	f.Fuzz(func(t *testing.T, body []byte) {
		s := splitter{maxDepth: 1 << 30}
		e, fault := s.split(body)
		valid := utf8.Valid(body) && json.Valid(body)
		if parse := fault != nil && fault.Code == CodeParse; parse == valid && s.deepest < 10_000 { // encoding/json's own limit
			t.Fatalf("valid %v, but %v", valid, fault)
		}
		if !valid {
			return
		}
		var members map[string]json.RawMessage
		if err := json.Unmarshal(body, &members); err != nil || members == nil {
			if fault == nil {
				t.Fatal("a message that is no object was taken")
			}
			return
		}
		if fault != nil && strings.Contains(fault.Message, "twice") {
			return
		}
		same := func(name string, got []byte) {
			if want := string(members[name]); got != nil && string(got) != want {
				t.Fatalf("%s is %q, want %q", name, got, want)
			}
		}
		same("id", e.id)
		same("params", e.params)
		same("result", e.result)
		same("error", e.failure)
		for _, name := range []string{"id", "params", "result", "error", "other"} {
			if got := memberOf(body, name); string(got) != string(members[name]) {
				t.Fatalf("memberOf %s is %q, want %q", name, got, members[name])
			}
		}
		if fault == nil && !e.reply {
			var method string
			if err := json.Unmarshal(members["method"], &method); err != nil || method != e.method {
				t.Fatalf("method %q, want %q (%v)", e.method, method, err)
			}
		}
	})
}
