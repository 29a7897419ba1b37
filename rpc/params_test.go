package rpc

import (
	"math"
	"strings"
	"testing"
)

type tripParams struct {
	Name    string    `json:"name"`
	Sample  []float64 `json:"sample,omitempty"`
	Level   *float64  `json:"level,omitempty"`
	Count   int       `json:"count,omitempty"`
	Pooled  bool      `json:"pooled,omitempty"`
	Depots  []string  `json:"depots,omitempty"`
	Given   Value     `json:"given,omitempty"`
	Options struct {
		First float64 `json:"first"`
	} `json:"options,omitempty"`
	Calls []struct {
		Name string `json:"name"`
	} `json:"calls,omitempty"`
}

func TestParamsAreFilledIn(t *testing.T) {
	var p tripParams
	err := decodeStrict([]byte(`{"name":"a","sample":[1,null],"level":0.95,"count":3e0,"pooled":true,"depots":["North","Quay"],"given":null,
		"options":{"first":2},"calls":[{"name":"x"},{"name":"y"}],"workDoneToken":"t"}`), &p)
	if err != nil {
		t.Fatal(err)
	}
	if p.Name != "a" || len(p.Sample) != 2 || p.Sample[0] != 1 || !math.IsNaN(p.Sample[1]) || *p.Level != 0.95 || p.Count != 3 || !p.Pooled ||
		len(p.Depots) != 2 || p.Depots[1] != "Quay" || p.Given.Pointer != "/given" || p.Options.First != 2 || len(p.Calls) != 2 || p.Calls[1].Name != "y" {
		t.Errorf("got %+v", p)
	}
	p = tripParams{}
	if err := decodeStrict([]byte(`{"name":"","depots":[],"sample":`+packed(2.5)+`}`), &p); err != nil || p.Sample[0] != 2.5 || p.Level != nil {
		t.Errorf("got %+v, %v", p, err)
	}
	var none struct{}
	if err := decodeStrict(nil, &none); err != nil {
		t.Error(err)
	}
}

func TestFaultyParamsAreRefusedByName(t *testing.T) {
	for _, test := range []struct{ params, pointer, message string }{
		{``, "/name", "name is missing; give a text."},
		{`{}`, "/name", "name is missing; give a text."},
		{`{"name":null}`, "/name", "name is null; give a text."},
		{`{"name":7}`, "/name", "name is a number; give a text."},
		{`{"Name":"a"}`, "/Name", "Name is unknown; did you mean name?"},
		{`{"name":"a","levle":0.9}`, "/levle", "levle is unknown; did you mean level?"},
		{`{"name":"a","x":0}`, "/x", "x is unknown; the members are name, sample, level, count, pooled, depots, given, options, calls."},
		{`{"name":"a","level":null}`, "/level", "level is null; leave it out, or give a number."},
		{`{"name":"a","level":"0.9"}`, "/level", "level is a text; give a number."},
		{`{"name":"a","level":1e400}`, "/level", "level is 1e400, which no double holds; the largest is about 1.8e308."},
		{`{"name":"a","count":2.5}`, "/count", "count is 2.5; give a whole number."},
		{`{"name":"a","count":1e300}`, "/count", "count is 1e+300; give a whole number from -9007199254740992 to 9007199254740992."},
		{`{"name":"a","pooled":"yes"}`, "/pooled", "pooled is a text; give true or false."},
		{`{"name":"a","pooled":0}`, "/pooled", "pooled is a number; give true or false."},
		{`{"name":"a","sample":3}`, "/sample", "sample is a number; give a list of numbers."},
		{`{"name":"a","sample":[1,"2"]}`, "/sample/1", "sample, element 2, is a text; give a number, or null for a gap."},
		{`{"name":"a","sample":[[1]]}`, "/sample/0", "sample, element 1, is a list of numbers; give a number, or null for a gap."},
		{`{"name":"a","sample":{"float64":"x"}}`, "/sample", "sample is an object; give a list of numbers."},
		{`{"name":"a","depots":"North"}`, "/depots", "depots is a text; give a list."},
		{`{"name":"a","depots":["North",null]}`, "/depots/1", "depots, element 2, is null; leave it out, or give a text."},
		{`{"name":"a","depots":[1]}`, "/depots/0", "depots, element 1, is a number; give a text."},
		{`{"name":"a","options":[]}`, "/options", "options is a list of numbers; give an object."},
		{`{"name":"a","options":{}}`, "/options/first", "first is missing; give a number."},
		{`{"name":"a","options":{"frist":1}}`, "/options/frist", "frist is unknown; did you mean first?"},
		{`{"name":"a","calls":[{"name":"x"},{"nam":"y"}]}`, "/calls/1/nam", "nam is unknown; did you mean name?"},
		{`{"name":"a","calls":[{"name":"x","workDoneToken":1}]}`, "/calls/0/workDoneToken", "workDoneToken is unknown; the members are name."},
		{`{"name":"a","name":"b"}`, "/name", "name is given twice; give each member once."},
		{`{"name":"a","":0}`, "/", `"" is unknown; the members are name, sample, level, count, pooled, depots, given, options, calls.`},
		{`{"name":"a","` + strings.Repeat("x", 1000) + `":0}`, "/" + strings.Repeat("x", 1000), `"` + strings.Repeat("x", 60) + `…" is unknown; the members are name, sample, level, count, pooled, depots, given, options, calls.`},
	} {
		t.Run(test.params, func(t *testing.T) {
			var p tripParams
			wantFault(t, decodeStrict([]byte(test.params), &p), test.pointer, test.message)
		})
	}
	var none struct{}
	wantFault(t, decodeStrict([]byte(`{"a":1}`), &none), "/a", "a is unknown; no members are taken here.")
}

func TestLenientParamsPassOverTheUnknown(t *testing.T) {
	var p struct {
		Value string `json:"value"`
		Inner struct {
			Line int `json:"line"`
		} `json:"inner"`
	}
	if err := decodeLenient([]byte(`{"value":"x","other":1,"inner":{"line":3,"more":null}}`), &p); err != nil || p.Value != "x" || p.Inner.Line != 3 {
		t.Errorf("got %+v, %v", p, err)
	}
	wantFault(t, decodeLenient([]byte(`{"inner":{"line":"3"}}`), &p), "/inner/line", "line is a text; give a whole number.")
	wantFault(t, decodeLenient([]byte(`{"value":7}`), &p), "/value", "value is a number; give a text.")
	if err := decodeLenient(nil, &p); err != nil {
		t.Error(err)
	}
}
