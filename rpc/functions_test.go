package rpc

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"math"
	"reflect"
	"slices"
	"strconv"
	"strings"
	"testing"
	"time"

	"halfwidth/funcs"
)

// reply is a message from the server as a client reads it.
type reply struct {
	ID     json.RawMessage `json:"id"`
	Method string          `json:"method"`
	Result json.RawMessage `json:"result"`
	Error  *Error          `json:"error"`
}

func (c *testClient) reply() reply {
	c.t.Helper()
	var r reply
	if text := c.next(); json.Unmarshal([]byte(text), &r) != nil {
		c.t.Fatalf("not to be read: %s", text)
	}
	return r
}

// answered is an element of the result of functions/answerMany.
type answered struct {
	Outcome json.RawMessage `json:"outcome"`
	Error   *Error          `json:"error"`
}

// wireOutcome is an outcome as a client reads it. Numbers keep their text.
type wireOutcome struct {
	Function string         `json:"function"`
	Status   string         `json:"status"`
	Results  map[string]any `json:"results"`
	Table    []struct {
		Values map[string]any `json:"values"`
		Status string         `json:"status"`
		Note   string         `json:"note"`
	} `json:"table"`
	Findings []struct {
		Code, Severity, Input, Message string
		Cells                          []string
	} `json:"findings"`
}

func readOutcome(t *testing.T, text []byte) wireOutcome {
	t.Helper()
	d := json.NewDecoder(bytes.NewReader(text))
	d.UseNumber()
	var o wireOutcome
	if err := d.Decode(&o); err != nil {
		t.Fatalf("%v: %s", err, text)
	}
	return o
}

// sameValue reports whether a value read from the wire is the catalogue's.
func sameValue(got, want any) bool {
	n, isNumber := got.(json.Number)
	if !isNumber {
		return got == want
	}
	x, err := strconv.ParseFloat(n.String(), 64)
	switch w := want.(type) {
	case float64:
		return err == nil && math.Float64bits(x) == math.Float64bits(w)
	case int:
		return err == nil && x == float64(w) && !strings.ContainsAny(n.String(), ".eE")
	}
	return false
}

// compareOutcome fails where what came is not what the catalogue gives.
func compareOutcome(t *testing.T, got wireOutcome, want *funcs.Outcome) {
	t.Helper()
	name := want.Function.Name
	if got.Function != name || got.Status != string(want.Status) {
		t.Errorf("%s: function %s, status %s, want %s", name, got.Function, got.Status, want.Status)
	}
	compare := func(where string, values map[string]any, list []funcs.Argument) {
		t.Helper()
		if len(values) != len(list) {
			t.Errorf("%s: %d values, want %d: %v", where, len(values), len(list), values)
		}
		for _, r := range list {
			if v, ok := values[r.Name]; !ok || !sameValue(v, r.Value) {
				t.Errorf("%s: %s = %v, want %v", where, r.Name, v, r.Value)
			}
		}
	}
	compare(name, got.Results, want.Results())
	if len(got.Table) != len(want.Rows) {
		t.Fatalf("%s: %d rows, want %d", name, len(got.Table), len(want.Rows))
	}
	for i, row := range want.Rows {
		var list []funcs.Argument
		for column, v := range row.Values {
			list = append(list, funcs.Argument{Name: column, Value: v})
		}
		compare(fmt.Sprintf("%s, row %d", name, i+1), got.Table[i].Values, list)
		if got.Table[i].Status != string(row.Status()) || got.Table[i].Note != funcs.Note(row.Findings) {
			t.Errorf("%s, row %d: %s %q", name, i+1, got.Table[i].Status, got.Table[i].Note)
		}
	}
	if len(got.Findings) != len(want.Findings) {
		t.Fatalf("%s: %d findings, want %d", name, len(got.Findings), len(want.Findings))
	}
	for i, f := range want.Findings {
		g := got.Findings[i]
		if g.Code != f.Code || g.Severity != f.Severity.String() || g.Input != f.Input || g.Message != f.Message || !slices.Equal(g.Cells, f.Cells) {
			t.Errorf("%s: finding %+v, want %+v", name, g, f)
		}
	}
}

// exampleArguments gives the worked example as funcs takes it and as JSON.
func exampleArguments(t *testing.T, f *funcs.Function) (map[string]any, string) {
	t.Helper()
	m := map[string]any{}
	for _, a := range f.Example.Arguments {
		m[a.Name] = a.Value
	}
	text, err := json.Marshal(wireArguments(f.Example.Arguments))
	if err != nil {
		t.Fatalf("%s: %v", f.Name, err)
	}
	return m, string(text)
}

// The server and the catalogue are two doors to one answer.
func TestEveryExampleGivesTheCataloguesDigits(t *testing.T) {
	all := funcs.All()
	c := begin(t, Options{})
	c.initialize()
	var calls []string
	for i, f := range all {
		_, arguments := exampleArguments(t, f)
		calls = append(calls, fmt.Sprintf(`{"name":%q,"arguments":%s}`, f.Name, arguments))
		c.send(`{"jsonrpc":"2.0","id":%d,"method":"functions/answer","params":%s}`, i, calls[i])
	}
	want := make([]*funcs.Outcome, len(all))
	for i, f := range all {
		arguments, _ := exampleArguments(t, f)
		var err error
		if want[i], err = f.Answer(context.Background(), arguments); err != nil {
			t.Fatalf("%s: %v", f.Name, err)
		}
	}
	one := make([]json.RawMessage, len(all))
	for range all {
		r := c.patientReply()
		i, err := strconv.Atoi(string(r.ID))
		if err != nil || r.Error != nil {
			t.Fatalf("%s: %+v", r.ID, r.Error)
		}
		one[i] = r.Result
		compareOutcome(t, readOutcome(t, r.Result), want[i])
		validate(t, schemaText(t, outcomeSchema(all[i])), r.Result)
		validate(t, schemaText(t, outcomeSchema(nil)), r.Result)
	}
	c.leave()

	// Quick ones only, so that the slow are not worked out a third time.
	c = begin(t, Options{})
	c.initialize()
	var quick []int
	var some []string
	for i, f := range all {
		if f.Family != "sizes" {
			quick, some = append(quick, i), append(some, calls[i])
		}
	}
	c.send(`{"jsonrpc":"2.0","id":"many","method":"functions/answerMany","params":{"calls":[%s]}}`, strings.Join(some, ","))
	var many []answered
	r := c.patientReply()
	if err := json.Unmarshal(r.Result, &many); err != nil || len(many) != len(quick) {
		t.Fatalf("%d answers (%v) %v", len(many), err, r.Error)
	}
	validate(t, schemaText(t, answersSchema()), r.Result)
	for k, i := range quick {
		if string(many[k].Outcome) != string(one[i]) {
			t.Errorf("%s among many:\n got %s\nwant %s", all[i].Name, many[k].Outcome, one[i])
		}
	}
	c.leave()
}

// patientReply waits as long as the slowest plan takes.
func (c *testClient) patientReply() reply {
	c.t.Helper()
	for deadline := time.Now().Add(100 * time.Second); len(c.messages) == 0 && time.Now().Before(deadline); {
		time.Sleep(time.Millisecond)
	}
	return c.reply()
}

func TestTheCatalogueIsListedAndDescribed(t *testing.T) {
	c := begin(t, Options{})
	c.initialize()
	c.send(`{"jsonrpc":"2.0","id":1,"method":"functions/list"}`)
	var list []listed
	r := c.reply()
	if err := json.Unmarshal(r.Result, &list); err != nil || len(list) != len(funcs.All()) {
		t.Fatalf("%d functions (%v)", len(list), err)
	}
	validate(t, schemaText(t, listSchema()), r.Result)
	for i, f := range funcs.All() {
		if list[i] != (listed{f.Name, f.Family, f.Summary}) {
			t.Errorf("got %+v, want %s", list[i], f.Name)
		}
		c.send(`{"jsonrpc":"2.0","id":2,"method":"functions/describe","params":{"name":%q}}`, f.Name)
		r := c.reply()
		validate(t, schemaText(t, descriptionSchema()), r.Result)
		var d struct {
			Name, Family   string
			Version        int
			Inputs         []inputDescription
			Results, Table []resultDescription
			Alternatives   [][]wayDescription
			Example        struct{ Arguments json.RawMessage }
			Schemas        struct{ Arguments, Outcome json.RawMessage }
		}
		if err := json.Unmarshal(r.Result, &d); err != nil {
			t.Fatal(err)
		}
		if d.Name != f.Name || d.Family != f.Family || d.Version != f.Version || len(d.Inputs) != len(f.Inputs) ||
			len(d.Results) != len(f.Results)+len(funcs.CommonResults) || len(d.Table) != len(f.Table) || len(d.Alternatives) != len(f.OneOf) {
			t.Errorf("%s is described as %+v", f.Name, d)
		}
		for k, in := range f.Inputs {
			if d.Inputs[k].Name != in.Name || d.Inputs[k].Kind != in.Kind.String() || d.Inputs[k].Required != f.Required(in.Name) || d.Inputs[k].Accepts == "" {
				t.Errorf("%s: input %+v", f.Name, d.Inputs[k])
			}
		}
		_, arguments := exampleArguments(t, f)
		if !reflect.DeepEqual(anyJSON(t, d.Example.Arguments), anyJSON(t, []byte(arguments))) {
			t.Errorf("%s: the example's arguments are %s", f.Name, d.Example.Arguments)
		}
		validate(t, d.Schemas.Arguments, d.Example.Arguments)
		compile(t, d.Schemas.Outcome)
	}
	for _, family := range funcs.Families() {
		c.send(`{"jsonrpc":"2.0","id":3,"method":"functions/list","params":{"family":%q}}`, family.Name)
		if err := json.Unmarshal(c.reply().Result, &list); err != nil || len(list) != len(family.Functions) || list[0].Name != family.Functions[0].Name {
			t.Errorf("%s: %+v (%v)", family.Name, list, err)
		}
	}
	c.leave()
}

func TestEverySpellingOfASampleHasTheSameFingerprint(t *testing.T) {
	c := begin(t, Options{})
	c.initialize()
	print := func(arguments string) string {
		t.Helper()
		c.send(`{"jsonrpc":"2.0","id":1,"method":"functions/answer","params":{"name":"mean-interval","arguments":{"sample":%s,"checks":false}}}`, arguments)
		r := c.reply()
		if r.Error != nil {
			t.Fatalf("%s: %s", arguments, r.Error.Message)
		}
		return fmt.Sprint(readOutcome(t, r.Result).Results["fingerprint"])
	}
	want := print(`[12.1,11.8,12.6,12.0,12.4]`)
	for _, same := range []string{`[ 12.10 , 118e-1, 12.6,12,1.24e1 ]`, packed(12.1, 11.8, 12.6, 12, 12.4), `"12.1; 11.8; 12.6; 12.0; 12.4"`} {
		if got := print(same); got != want {
			t.Errorf("%s has the fingerprint %s, want %s", same, got, want)
		}
	}
	gaps := print(`[12.1,null,12.6,12.0,12.4]`)
	if got := print(packed(12.1, math.NaN(), 12.6, 12, 12.4)); got != gaps || got == want {
		t.Errorf("with a gap the fingerprint is %s, want %s, and not %s", got, gaps, want)
	}
	if gap := math.Float64frombits(0xFFF0_0000_0000_0123); print(packed(12.1, gap, 12.6, 12, 12.4)) != gaps {
		t.Error("another NaN is another gap")
	}
	c.leave()
}

func TestOneBadCallFailsAlone(t *testing.T) {
	c := begin(t, Options{})
	c.initialize()
	good := `{"name":"standard-score","arguments":{"value":12,"mean":10,"sd":2}}`
	c.send(`{"jsonrpc":"2.0","id":1,"method":"functions/answerMany","params":{"calls":[%s,%s],"workDoneToken":7}}`, good, strings.Join([]string{
		`{"name":"standard-score","arguments":{"value":1e999,"mean":10,"sd":0}}`,
		`{"name":"mean-interval","arguments":{"sample":[5,5,5]}}`,
		`{"name":"mean-intervall","arguments":{}}`,
		`{"name":"standard-score","arguments":{"value":12},"book":"b.xlsx"}`,
		`{"name":"standard-score"}`, `{"name":7,"arguments":{}}`, `{"name":"standard-score","name":"standard-score","arguments":{}}`, `null`, `[1]`, good}, ","))
	c.want(`{"jsonrpc":"2.0","method":"$/progress","params":{"token":7,"value":{"cancellable":true,"kind":"begin","percentage":0,"title":"Working out 11 calls"}}}`)
	c.want(`{"jsonrpc":"2.0","method":"$/progress","params":{"token":7,"value":{"kind":"end"}}}`)
	r := c.reply()
	validate(t, schemaText(t, answersSchema()), r.Result)
	var answers []answered
	if err := json.Unmarshal(r.Result, &answers); err != nil {
		t.Fatalf("%v: %s", err, r.Result)
	}
	for i, want := range []struct{ status, message, pointer string }{
		{status: "ok"},
		{message: "The arguments have 2 faults, the first: value is 1e999, which no double holds; the largest is about 1.8e308.", pointer: "/calls/1/arguments/value"},
		{status: "refused"},
		{message: `There is no function "mean-intervall"; did you mean "mean-interval"?`, pointer: "/calls/3/name"},
		{message: "book is unknown; the members are name, arguments.", pointer: "/calls/4/book"},
		{message: "arguments is missing; give an object.", pointer: "/calls/5/arguments"},
		{message: "name is a number; give a text.", pointer: "/calls/6/name"},
		{message: "name is given twice; give each member once.", pointer: "/calls/7/name"},
		{message: "call is null; leave it out, or give an object.", pointer: "/calls/8"},
		{message: "call is a list of numbers; give an object.", pointer: "/calls/9"},
		{status: "ok"},
	} {
		got := answers[i]
		switch {
		case want.status != "" && (got.Error != nil || readOutcome(t, got.Outcome).Status != want.status):
			t.Errorf("call %d: %+v %s, want %s", i, got.Error, got.Outcome, want.status)
		case want.status == "" && (got.Error == nil || got.Outcome != nil):
			t.Errorf("call %d: %s, want an error", i, got.Outcome)
		case want.status == "" && (got.Error.Message != want.message || got.Error.Data.Pointer != want.pointer || got.Error.Code != CodeInvalidParams):
			t.Errorf("call %d: %d %s at %s, want %s at %s", i, got.Error.Code, got.Error.Message, got.Error.Data.Pointer, want.message, want.pointer)
		}
	}
	if string(answers[0].Outcome) != string(answers[10].Outcome) {
		t.Error("the same call gave two outcomes")
	}
	c.send(`{"jsonrpc":"2.0","id":2,"method":"functions/answerMany","params":{"calls":[]}}`)
	c.want(`{"jsonrpc":"2.0","id":2,"result":[]}`)
	c.send(`{"jsonrpc":"2.0","id":3,"method":"functions/answerMany","params":{"calls":[%s],"book":"Trips.xlsx"}}`, good)
	c.wantPart(`"id":3`, `-32602`, `"book is \"Trips.xlsx\", and no book of that name is open; open its sheets with sheets/didOpen first, or leave book out."`, `"pointer":"/book"`)
	c.leave()
}
