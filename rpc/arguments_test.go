package rpc

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"reflect"
	"strings"
	"testing"

	"halfwidth/funcs"
	"halfwidth/workbook/calculation"
)

// fault is one bad argument as told to a program.
type fault struct{ argument, pointer, reason, suggestion string }

func faults(e *Error) []fault {
	var out []fault
	for _, d := range append([]ErrorData{*e.Data}, e.Data.Others...) {
		out = append(out, fault{d.Argument, d.Pointer, d.Reason, d.Suggestion})
	}
	return out
}

func arguments(e *Error) []string {
	var names []string
	for _, f := range faults(e) {
		names = append(names, f.argument)
	}
	return names
}

const sampleForm = `a list of numbers, {"float64le": "BASE64"} or a sample expression`

func TestBadArgumentsAreToldWordForWord(t *testing.T) {
	noBook := "name an open book under book, or give the numbers themselves"
	for _, test := range []struct {
		function, arguments, message string
		faults                       []fault
	}{
		{"mean-interval", `{"smple":1,"checks":1,"confidence":95,"n":1.5,"sd":-1,"mean":1,"direction":"Above"}`,
			"The arguments have 6 faults, the first: sd is -1, but must be 0 or more.", []fault{
				{"sd", "/sd", "is -1, but must be 0 or more", ""},
				{"n", "/n", "is 1.5, but must be a whole number, 2 or more", ""},
				{"confidence", "/confidence", "is 95, but must be a number, strictly between 0 and 1", "write 0.95"},
				{"direction", "/direction", `is the text "Above", but must be either, above or below`, "above"},
				{"checks", "/checks", "is 1, but must be true or false", ""},
				{"smple", "/smple", "is no input of mean-interval", "sample"}}},
		{"mean-interval", `{"Sample":[1,2]}`, "The arguments have 2 faults, the first: sample is missing; give either sample, or mean with sd and n.", []fault{
			{"sample", "/sample", "is missing", "give either sample, or mean with sd and n"},
			{"Sample", "/Sample", "is no input of mean-interval", "sample"}}},
		{"mean-interval", `{"sample":[1,2],"mean":3}`, "mean cannot be given together with sample; give either sample, or mean with sd and n.",
			[]fault{{"mean", "/mean", "cannot be given together with sample", "give either sample, or mean with sd and n"}}},
		{"mean-interval", `{"sample":null,"sample":[1],"confidence":0.5}`, "The arguments have 2 faults, the first: sample is null; leave it out, or give " + sampleForm + ".", []fault{
			{"sample", "/sample", "is null", "leave it out, or give " + sampleForm},
			{"sample", "/sample", "is given twice", "give each member once"}}},
		{"mean-interval", `{"mean":"12,5","sd":[1],"n":"three"}`, "The arguments have 3 faults, the first: mean cannot be read: character 3, at ,: write numbers with ; between them and . as the decimal mark.", []fault{
			{"mean", "/mean", "cannot be read: character 3, at ,: write numbers with ; between them and . as the decimal mark", ""},
			{"sd", "/sd", "is a list of numbers, but must be a number, 0 or more", ""},
			{"n", "/n", `is the text "three", but must be a whole number, 2 or more`, ""}}},
		{"mean-interval", `{"sample":[1,2],"confidence":"95%","direction":1,"checks":"yes"}`,
			`The arguments have 3 faults, the first: confidence is the text "95%", but must be a number, strictly between 0 and 1; write 0.95.`, []fault{
				{"confidence", "/confidence", `is the text "95%", but must be a number, strictly between 0 and 1`, "write 0.95"},
				{"direction", "/direction", "is 1, but must be either, above or below", ""},
				{"checks", "/checks", `is the text "yes", but must be true or false`, ""}}},
		{"mean-interval", `{"sample":[1,2],"confidence":0}`, "confidence is 0, but must be a number, strictly between 0 and 1; write a share such as 0.95.",
			[]fault{{"confidence", "/confidence", "is 0, but must be a number, strictly between 0 and 1", "write a share such as 0.95"}}},
		{"mean-interval", `{"sample":[1,null,"2"]}`, `sample, value 3 is the text "2", but must be a number, or null for a gap.`,
			[]fault{{"sample", "/sample/2", `is the text "2", but must be a number, or null for a gap`, ""}}},
		{"mean-interval", `{"sample":[1,2,1e400,-1e400]}`, "sample, value 3 is 1e400, which no double holds; the largest is about 1.8e308.",
			[]fault{{"sample", "/sample/2", "is 1e400, which no double holds", "the largest is about 1.8e308"}}},
		{"mean-interval", `{"sample":{"float64le":"AAAA"}}`, "sample has 3 bytes, which is no whole number of doubles; give the doubles as 8 bytes each, lowest byte first, in base64 with padding.",
			[]fault{{"sample", "/sample/float64le", "has 3 bytes, which is no whole number of doubles", "give the doubles as 8 bytes each, lowest byte first, in base64 with padding"}}},
		{"mean-interval", `{"sample":{"float64le":"AAAAAAAA8D8=","unit":"min"}}`, "sample (float64le) stands beside other members; let it stand alone in its object.",
			[]fault{{"sample", "/sample/float64le", "stands beside other members", "let it stand alone in its object"}}},
		{"mean-interval", `{"sample":{"float64be":"AAAAAAAA8D8="}}`, "sample is an object, but must be " + sampleForm + ".",
			[]fault{{"sample", "/sample", "is an object, but must be " + sampleForm, ""}}},
		{"mean-interval", `{"sample":[],"confidence":0.9}`, "sample holds no number; give at least two values.",
			[]fault{{"sample", "/sample", "holds no number", "give at least two values"}}},
		{"mean-interval", `{"sample":12.5}`, "sample is 12.5, but must be " + sampleForm + ".",
			[]fault{{"sample", "/sample", "is 12.5, but must be " + sampleForm, ""}}},
		{"mean-interval", `{"sample":" "}`, "sample is an empty text; leave it out, or give " + sampleForm + ".",
			[]fault{{"sample", "/sample", "is an empty text", "leave it out, or give " + sampleForm}}},
		{"mean-interval", `{"sample":"minutes in Trips","reference":"Trips!B2"}`,
			`The arguments have 2 faults, the first: sample names the sheet "Trips", but no book is open; name an open book under book, or give the numbers themselves.`, []fault{
				{"sample", "/sample", `names the sheet "Trips", but no book is open`, noBook},
				{"reference", "/reference", `names the sheet "Trips", but no book is open`, noBook}}},
		{"mean-interval", `{"sample":"minutes in trips.csv"}`, `sample names the file "trips.csv", but no book is open; ` + noBook + ".",
			[]fault{{"sample", "/sample", `names the file "trips.csv", but no book is open`, noBook}}},
		{"mean-interval", `{"sample":"minutes in book.xlsx/Trips"}`, `sample names the sheet "Trips" of the file "book.xlsx", but no book is open; ` + noBook + ".",
			[]fault{{"sample", "/sample", `names the sheet "Trips" of the file "book.xlsx", but no book is open`, noBook}}},
		{"mean-interval", `{"sample":"C2:C9"}`, `sample names the range C2:C9, but no book is open; ` + noBook + ".",
			[]fault{{"sample", "/sample", "names the range C2:C9, but no book is open", noBook}}},
		{"t-probability", `{"df":"Infinite","to":true}`, `The arguments have 2 faults, the first: df is the text "Infinite", but must be a number, greater than 0, or the text "infinite"; did you mean "infinite"?`, []fault{
			{"df", "/df", `is the text "Infinite", but must be a number, greater than 0, or the text "infinite"`, "infinite"},
			{"to", "/to", "is true, but must be any number", ""}}},
		{"equal-spread-test", `{"samples":{"North":[1,2],"Quay":[4,"x"]},"kind":"levenne"}`,
			`The arguments have 2 faults, the first: samples (Quay), value 2 is the text "x", but must be a number, or null for a gap.`, []fault{
				{"samples", "/samples/Quay/1", `is the text "x", but must be a number, or null for a gap`, ""},
				{"kind", "/kind", `is the text "levenne", but must be brown-forsythe, levene or bartlett`, "levene"}}},
		{"equal-spread-test", `{"samples":{"North":[1,2],"a/b":[4,1e999]}}`, "samples (a/b), value 2 is 1e999, which no double holds; the largest is about 1.8e308.",
			[]fault{{"samples", "/samples/a~1b/1", "is 1e999, which no double holds", "the largest is about 1.8e308"}}},
		{"equal-spread-test", `{"samples":{"North":[1,2],"North":[4,5]}}`, "samples (North) is given twice; give each member once.",
			[]fault{{"samples", "/samples/North", "is given twice", "give each member once"}}},
		{"equal-spread-test", `{"samples":{"North":[1,2],"":[4,5]}}`, `samples, value 2 is "", but must be a name of its own; give each group a name.`,
			[]fault{{"samples", "/samples/", `is "", but must be a name of its own`, "give each group a name"}}},
		{"equal-spread-test", `{"samples":{"North":[1,2],"Quay":3}}`, `samples (Quay) is 3, but must be a list of numbers; give a list, or {"float64le": "BASE64"}.`,
			[]fault{{"samples", "/samples/Quay", "is 3, but must be a list of numbers", `give a list, or {"float64le": "BASE64"}`}}},
		{"equal-spread-test", `{"samples":[[1,2],[3,4]]}`, "samples is a list, but must be an object with a list of numbers under each name, or a sample expression.",
			[]fault{{"samples", "/samples", "is a list, but must be an object with a list of numbers under each name, or a sample expression", ""}}},
		{"pooled-variance", `{"sds":{"North":1,"Quay":-2},"ns":{"North":3,"Quay":null}}`, "The arguments have 2 faults, the first: sds (Quay), value 2 is -2, but must be 0 or more.", []fault{
			{"sds", "/sds/Quay", "is -2, but must be 0 or more", ""},
			{"ns", "/ns/Quay", "is null, but must be a number", ""}}},
		{"pooled-variance", `{"sds":[1,-1],"ns":[null,3]}`, "The arguments have 2 faults, the first: sds, value 2 is -1, but must be 0 or more.", []fault{
			{"sds", "/sds/1", "is -1, but must be 0 or more", ""},
			{"ns", "/ns/0", "is null, but must be a number", ""}}},
		{"pooled-variance", `{"sds":` + packed(1, -1) + `,"ns":[3,3]}`, "sds, value 2 is -1, but must be 0 or more.",
			[]fault{{"sds", "/sds", "is -1, but must be 0 or more", ""}}},
		{"pooled-variance", `{"sds":[1,2],"ns":[3]}`, "ns is 1 number, but must have one for each of the 2 groups of sds; give one a group, in the same order or by name.",
			[]fault{{"ns", "/ns", "is 1 number, but must have one for each of the 2 groups of sds", "give one a group, in the same order or by name"}}},
		{"adjusted-p-values", `{"p-values":[0.1,null,1.5]}`, "p-values, value 3 is 1.5, but must be from 0 to 1.",
			[]fault{{"p-values", "/p-values/2", "is 1.5, but must be from 0 to 1", ""}}},
	} {
		t.Run(test.function+" "+test.arguments, func(t *testing.T) {
			err := answerOf(t, test.function, test.arguments, nil)
			var e *Error
			if !errors.As(err, &e) {
				t.Fatalf("got %v", err)
			}
			if e.Code != CodeInvalidParams || e.Message != test.message || e.Data.Function != test.function {
				t.Errorf("got  %d %s %s\nwant %d %s %s", e.Code, e.Data.Function, e.Message, CodeInvalidParams, test.function, test.message)
			}
			if got := faults(e); !reflect.DeepEqual(got, test.faults) {
				t.Errorf("got  %+v\nwant %+v", got, test.faults)
			}
		})
	}
}

// answerOf works a question out and gives its error alone.
func answerOf(t *testing.T, function, arguments string, book calculation.Source) error {
	t.Helper()
	_, err := outcomeOf(t, function, arguments, book)
	return err
}

func outcomeOf(t *testing.T, function, arguments string, book calculation.Source) (*funcs.Outcome, error) {
	t.Helper()
	f, err := funcs.Lookup(function)
	if err != nil {
		t.Fatal(err)
	}
	v, err := parseFaulty([]byte(arguments), "")
	if err != nil {
		t.Fatal(err)
	}
	return (&question{function: f, arguments: v, book: book, limits: DefaultLimits()}).answer(context.Background())
}

func TestALongListIsRefusedByItsLimit(t *testing.T) {
	c := begin(t, Options{Limits: Limits{SampleValues: 3}})
	c.initialize()
	const advice = "give fewer, or start the server with a higher --max-sample-values"
	for arguments, where := range map[string]string{
		`{"sample":[1,2,3,4]}`:                    "/arguments/sample",
		`{"sample":` + packed(1, 2, 3, 4) + `}`:   "/arguments/sample",
		`{"sample":[1,2,3,"4"],"reference":null}`: "/arguments/sample",
	} {
		c.send(`{"jsonrpc":"2.0","id":1,"method":"functions/answer","params":{"name":"mean-interval","arguments":%s}}`, arguments)
		c.wantPart("sample is a list of 4 numbers, but may hold at most 3; "+advice, `"pointer":"`+where+`"`)
	}
	c.send(`{"jsonrpc":"2.0","id":1,"method":"functions/answer","params":{"name":"mean-interval","arguments":{"sample":[1,2,4]}}}`)
	c.wantPart(`"status":"caution"`)
	c.leave()
}

// trips is a book of one sheet, in memory.
func trips() calculation.Source {
	number := func(x float64) calculation.Cell { return calculation.Cell{Kind: calculation.Number, Number: x} }
	text := func(s string) calculation.Cell { return calculation.Cell{Kind: calculation.Text, Text: s} }
	time := func(x float64) calculation.Cell { return calculation.Cell{Kind: calculation.Duration, Number: x} }
	book := calculation.NewRows()
	book.AddSheet("Trips", [][]calculation.Cell{
		{text("depot"), text("minutes"), text("before"), text("taken")},
		{text("North"), number(12.1), number(11), time(0.01)},
		{text("North"), number(11.8), number(12), time(0.02)},
		{text("Quay"), number(13.5), {}, time(0.03)},
		{text("Quay"), number(14.5), number(15), time(0.04)},
		{text("North"), number(12.6), number(12.5), time(0.05)},
	})
	return book
}

// held is an open book.
func held(source calculation.Source) func() (calculation.Source, *Error) {
	return func() (calculation.Source, *Error) { return source, nil }
}

func TestExpressionsReadTheBookNamed(t *testing.T) {
	var session *Session
	c := begin(t, Options{began: func(s *Session) {
		session = s
		s.books = books{"Trips.xlsx": held(trips()), "Larkmoor.xlsx": held(calculation.NewRows())}
	}})
	c.initialize()
	ask := func(function, arguments string) reply {
		t.Helper()
		c.send(`{"jsonrpc":"2.0","id":1,"method":"functions/answer","params":{"name":%q,"arguments":%s,"book":"Trips.xlsx"}}`, function, arguments)
		return c.reply()
	}
	fingerprint := func(function, arguments string) any {
		t.Helper()
		r := ask(function, arguments)
		if r.Error != nil {
			t.Fatalf("%s: %s", arguments, r.Error.Message)
		}
		return readOutcome(t, r.Result).Results["fingerprint"]
	}
	for _, same := range [][3]string{
		{"mean-interval", `{"sample":"minutes in Trips where depot = North"}`, `{"sample":[12.1,11.8,12.6]}`},
		{"mean-interval", `{"mean":12,"sd":1,"n":"count in Trips where depot = North"}`, `{"mean":12,"sd":1,"n":3}`},
		{"equal-spread-test", `{"samples":"minutes in Trips for each depot"}`, `{"samples":{"North":[12.1,11.8,12.6],"Quay":[13.5,14.5]}}`},
		{"pooled-variance", `{"sds":{"North":1,"Quay":2},"ns":"count in Trips for each depot"}`, `{"sds":{"North":1,"Quay":2},"ns":{"North":3,"Quay":2}}`},
	} {
		if a, b := fingerprint(same[0], same[1]), fingerprint(same[0], same[2]); a != b {
			t.Errorf("%s: %s has the fingerprint %v, %s has %v", same[0], same[1], a, same[2], b)
		}
	}
	// Read together: the pair whose partner is missing counts as skipped.
	paired := readOutcome(t, ask("paired-interval", `{"sample":"minutes in Trips","second-sample":"before in Trips"}`).Result)
	if paired.Results["n"] != json.Number("4") || !strings.Contains(fmt.Sprint(paired.Results["range"]), "Trips!") {
		t.Errorf("pairs: %+v", paired.Results)
	}
	// Durations without a unit refuse the sample, not the call; but a faulty
	// call is told first.
	refused := ask("mean-interval", `{"sample":"taken in Trips"}`)
	if refused.Error != nil || readOutcome(t, refused.Result).Status != "refused" || !strings.Contains(string(refused.Result), "minutes") {
		t.Errorf("durations: %+v %s", refused.Error, refused.Result)
	}
	if faulty := ask("mean-interval", `{"sample":"taken in Trips","confidence":7}`); faulty.Error == nil || faulty.Error.Data.Argument != "confidence" {
		t.Errorf("durations and a faulty level: %+v %s", faulty.Error, faulty.Result)
	}
	faulty := ask("mean-interval", `{"sample":"minuts in Trips","reference":"depot in Trips","mean":"sum of minutes in Trips"}`)
	if faulty.Error == nil || !reflect.DeepEqual(arguments(faulty.Error), []string{"sample", "mean", "reference"}) || !strings.Contains(faulty.Error.Message, `"minutes"`) {
		t.Errorf("misspelt: %+v %s", faulty.Error, faulty.Result)
	}
	c.send(`{"jsonrpc":"2.0","id":1,"method":"functions/answer","params":{"name":"mean-interval","arguments":{"sample":"minutes in Trips"},"book":"trips.xlsx"}}`)
	c.want(`{"jsonrpc":"2.0","id":1,"error":{"code":-32602,"message":"book is \"trips.xlsx\", and no book of that name is open; open its sheets with sheets/didOpen first, or leave book out.",` +
		`"data":{"argument":"book","pointer":"/book","reason":"is \"trips.xlsx\", and no book of that name is open","suggestion":"Trips.xlsx"}}}`)
	c.leave()
	if session.books == nil {
		t.Error("the books are gone")
	}
}

// A Source that fails stops its call alone.
type brokenSource struct{ calculation.Source }

func (brokenSource) Places() []calculation.Place { panic("secret detail") }

func TestAFaultOfOursStopsItsCallAlone(t *testing.T) {
	c := begin(t, Options{began: func(s *Session) {
		s.books = books{"b": held(brokenSource{})}
	}})
	c.initialize()
	const bad, good = `{"name":"mean-interval","arguments":{"sample":"a in b"}}`, `{"name":"standard-score","arguments":{"value":12,"mean":10,"sd":2}}`
	c.send(`{"jsonrpc":"2.0","id":1,"method":"functions/answerMany","params":{"calls":[%s,%s],"book":"b"}}`, bad, good)
	c.wantPart(`"id":1,"result":[{"error":{"code":-32603,"message":"`+internalFault+`"}},{"outcome":{`, `"score":1,`)
	c.send(`{"jsonrpc":"2.0","id":2,"method":"functions/answer","params":{"name":"mean-interval","arguments":{"sample":"a in b"},"book":"b"}}`)
	c.want(`{"jsonrpc":"2.0","id":2,"error":{"code":-32603,"message":"` + internalFault + `"}}`)
	c.leave()
	if n := strings.Count(c.remarks.String(), "secret detail"); n != 2 {
		t.Errorf("%d faults were told to the error stream, want 2:\n%s", n, c.remarks)
	}
}

func TestTheCataloguesOwnFaultIsOurs(t *testing.T) {
	var session *Session
	c := begin(t, Options{began: func(s *Session) { session = s }})
	c.initialize()
	f := &funcs.Function{Name: "broken"} // has no computation
	call := &Call{Method: "functions/answer", Session: session}
	_, err := call.outcome(context.Background(), &question{function: f, arguments: Value{Kind: Object}, limits: DefaultLimits()})
	var e *Error
	if !errors.As(err, &e) || e.Code != CodeInternal || e.Message != internalFault {
		t.Errorf("got %v", err)
	}
	c.in.Close()
	c.ends(1)
	if !strings.Contains(c.remarks.String(), "broken") {
		t.Errorf("remarks were: %s", c.remarks)
	}
}

// FuzzArguments reads any JSON as the arguments of any function: no panic, and
// every fault is a wrong argument with its place.
func FuzzArguments(f *testing.F) {
	all := funcs.All()
	for i, fn := range all {
		text, err := json.Marshal(wireArguments(fn.Example.Arguments))
		if err != nil {
			f.Fatal(err)
		}
		f.Add(i, string(text))
	}
	for _, s := range []string{`{"sample":[1,"a",1e999],"sample":{"float64le":"x","y":1}}`, `{"samples":{"":[1],"a":"b"},"confidence":"95%"}`, `{"n":"count in Trips","means":"North = 1; Quay = 2"}`} {
		f.Add(0, s)
	}
	f.Fuzz(func(t *testing.T, index int, arguments string) {
		fn := all[((index%len(all))+len(all))%len(all)]
		if s := (splitter{maxDepth: 50}); true {
			if _, fault := s.split([]byte(arguments)); fault != nil && fault.Code == CodeParse || s.deepest > 50 {
				return
			}
		}
		v, err := parseFaulty([]byte(arguments), "/arguments")
		if err != nil {
			t.Fatalf("JSON was refused with %v", err)
		}
		if v.Kind != Object {
			return
		}
		err = checkArguments(t, fn, arguments)
		var e *Error
		if err == nil {
			return
		}
		if !errors.As(err, &e) || e.Code != CodeInvalidParams {
			t.Fatalf("%s: %v", arguments, err)
		}
		for _, d := range append([]ErrorData{*e.Data}, e.Data.Others...) {
			if d.Function != fn.Name || d.Reason == "" || !strings.HasPrefix(d.Pointer, pointerTo("/arguments", d.Argument)) {
				t.Fatalf("%s: %+v", arguments, d)
			}
		}
	})
}
