package rpc

import (
	"encoding/base64"
	"encoding/binary"
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"reflect"
	"strconv"
	"strings"
	"testing"
)

func packed(numbers ...float64) string {
	var b []byte
	for _, x := range numbers {
		b = binary.LittleEndian.AppendUint64(b, math.Float64bits(x))
	}
	return `{"float64le":"` + base64.StdEncoding.EncodeToString(b) + `"}`
}

// sameNumbers compares bit by bit, all NaN being one.
func sameNumbers(a, b []float64) bool {
	if len(a) != len(b) {
		return false
	}
	for i := range a {
		if math.Float64bits(a[i]) != math.Float64bits(b[i]) && !(math.IsNaN(a[i]) && math.IsNaN(b[i])) {
			return false
		}
	}
	return true
}

func TestListsOfNumbers(t *testing.T) {
	gap := math.NaN()
	for _, test := range []struct {
		text string
		want []float64
	}{
		{`[]`, nil},
		{` [ ] `, nil},
		{`[1]`, []float64{1}},
		{`[ 1 , -2.5e3 ,null, 0 ]`, []float64{1, -2500, gap, 0}},
		{`[null,null]`, []float64{gap, gap}},
		{`[-0,-0.0e5]`, []float64{math.Copysign(0, -1), math.Copysign(0, -1)}},
		// The doubles on either side of the halfway cases of IEEE 754-2019, section 4.3.1.
		{`[9007199254740993,9007199254740993.00000000000000000001]`, []float64{9007199254740992, 9007199254740994}},
		{`[1.7976931348623157e308,4.9e-324,2.2250738585072011e-308]`, []float64{math.MaxFloat64, math.SmallestNonzeroFloat64, 2.2250738585072011e-308}},
		{`[1e-400]`, []float64{0}},
		{packed(1, -2.5, gap, math.MaxFloat64), []float64{1, -2.5, gap, math.MaxFloat64}},
		{`{ "float64le" : "" }`, nil},
		{`{"float64le":"AAAAAAAA8D\u0038="}`, []float64{1}},
	} {
		v, err := ParseValue([]byte(test.text), "")
		if err != nil || v.Kind != Numbers || !sameNumbers(v.Numbers, test.want) {
			t.Errorf("%s gave %v %v, %v; want %v", test.text, v.Kind, v.Numbers, err, test.want)
		}
	}
}

func TestNumbersAreReadAsStrconvReadsThem(t *testing.T) {
	random := rand.New(rand.NewPCG(1, 2))
	var want []float64
	var b strings.Builder
	for i := range 20_000 {
		x := math.Float64frombits(random.Uint64())
		if math.IsNaN(x) || math.IsInf(x, 0) {
			continue
		}
		text := strconv.FormatFloat(x, "efg"[i%3], []int{-1, 20, 5}[i/3%3], 64)
		x, err := strconv.ParseFloat(text, 64)
		if err != nil {
			continue
		}
		if want = append(want, x); len(want) > 1 {
			b.WriteByte(',')
		}
		b.WriteString(text)
	}
	v, err := ParseValue([]byte("["+b.String()+"]"), "")
	if err != nil || !sameNumbers(v.Numbers, want) {
		t.Fatalf("%d numbers, want %d (%v)", len(v.Numbers), len(want), err)
	}
	if cap(v.Numbers) != len(want) {
		t.Errorf("room for %d numbers was taken for %d", cap(v.Numbers), len(want))
	}
	out, err := json.Marshal(Series(want))
	if err != nil {
		t.Fatal(err)
	}
	if plain, err := json.Marshal(want); err != nil || string(plain) != string(out) {
		t.Errorf("a list goes out otherwise than encoding/json writes it (%v)", err)
	}
	if v, err = ParseValue(out, ""); err != nil || !sameNumbers(v.Numbers, want) {
		t.Errorf("written and read again they are others (%v)", err)
	}
	long := make([]float64, 10_007)
	for i := range long {
		long[i] = random.NormFloat64()
	}
	if v, err = ParseValue([]byte(packed(long...)), ""); err != nil || !sameNumbers(v.Numbers, long) {
		t.Errorf("a long packed list is another (%v)", err)
	}
}

func TestNumbersGoOutInTheShortestForm(t *testing.T) {
	for _, test := range []struct {
		x    float64
		want string
	}{
		{0, "0"}, {math.Copysign(0, -1), "-0"}, {12.5, "12.5"}, {0.1, "0.1"}, {1.0 / 3, "0.3333333333333333"}, {1e-6, "0.000001"},
		{1.5e-7, "1.5e-7"}, {1e-10, "1e-10"}, {123456789012345680000, "123456789012345680000"}, {1e21, "1e+21"}, {math.MaxFloat64, "1.7976931348623157e+308"}, {math.NaN(), "null"},
	} {
		got := string(appendNumber(nil, test.x))
		if got != test.want {
			t.Errorf("%v went out as %s, want %s", test.x, got, test.want)
		}
		if back, err := strconv.ParseFloat(got, 64); !math.IsNaN(test.x) && (err != nil || math.Float64bits(back) != math.Float64bits(test.x)) {
			t.Errorf("%s reads back as %v", got, back)
		}
	}
}

// wantFault checks an error's code, the data's pointer and its message.
func wantFault(t *testing.T, err error, pointer, message string) {
	t.Helper()
	var e *Error
	if !errors.As(err, &e) || e.Data == nil {
		t.Errorf("got %v, want a fault at %q: %s", err, pointer, message)
		return
	}
	if e.Code != CodeInvalidParams || e.Data.Pointer != pointer || e.Message != message {
		t.Errorf("got  %d at %q: %s\nwant %d at %q: %s", e.Code, e.Data.Pointer, e.Message, CodeInvalidParams, pointer, message)
	}
}

func TestFaultyValuesAreRefusedByPlace(t *testing.T) {
	const form = "; give the doubles as 8 bytes each, lowest byte first, in base64 with padding."
	for _, test := range []struct{ text, pointer, message string }{
		{`{"a":{"b":[1,2,1e400]}}`, "/a/b/2", "b, element 3, is 1e400, which no double holds; the largest is about 1.8e308."},
		{`{"a":-1e999}`, "/a", "a is -1e999, which no double holds; the largest is about 1.8e308."},
		{`{"x/y":{"~":[[1e400]]}}`, "/x~1y/~0/0/0", "0, element 1, is 1e400, which no double holds; the largest is about 1.8e308."},
		{`{"a":1,"b":2,"a":3}`, "/a", "a is given twice; give each member once."},
		{`[1,{"a":1,"\u0061":1}]`, "/1/a", "a is given twice; give each member once."},
		{`{"float64le":"AAAA"}`, "/float64le", "float64le has 3 bytes, which is no whole number of doubles" + form},
		{`{"float64le":"AAAAAAAA8D8"}`, "/float64le", "float64le is not base64" + form},
		{`{"float64le":"AAAAAAAA8D9="}`, "/float64le", "float64le is not base64" + form},
		{`{"float64le":"*AAAAAAA8D8="}`, "/float64le", "float64le is not base64" + form},
		{`{"s":{"float64le":"AAAAAAAA8H8="}}`, "/s/float64le", "float64le holds an infinite number at place 1" + form},
		{`{"float64le":"AAAAAAAA8D8=","unit":"min"}`, "/float64le", "float64le stands beside other members; let it stand alone in its object."},
		{`[1,2`, "", "The params are no JSON text: at byte 4 stands the end where a comma or ] in a list is expected."},
		{`[1,nil]`, "", "The params are no JSON text: at byte 4 stands 'i' where the word null is expected."},
		{`1 2`, "", "The params are no JSON text: at byte 2 stands '2' where the end is expected."},
	} {
		_, err := ParseValue([]byte(test.text), "")
		t.Run(test.text, func(t *testing.T) { wantFault(t, err, test.pointer, test.message) })
	}
}

func TestMixedListsKeepTheirElements(t *testing.T) {
	v, err := ParseValue([]byte(`[1,null,"a",[2],{"b":true}]`), "/p")
	if err != nil || v.Kind != List || len(v.List) != 5 {
		t.Fatalf("%+v, %v", v, err)
	}
	for i, want := range []struct {
		kind    Kind
		pointer string
	}{{Number, "/p/0"}, {Null, "/p/1"}, {Text, "/p/2"}, {Numbers, "/p/3"}, {Object, "/p/4"}} {
		if v.List[i].Kind != want.kind || v.List[i].Pointer != want.pointer {
			t.Errorf("element %d is %v at %s", i, v.List[i].Kind, v.List[i].Pointer)
		}
	}
	if m := v.List[4].Members; len(m) != 1 || m[0].Name != "b" || !m[0].Value.YesNo || m[0].Value.Pointer != "/p/4/b" {
		t.Errorf("members are %+v", m)
	}
	if e := (Value{Kind: Numbers, Numbers: []float64{1, math.NaN()}, Pointer: "/q"}).Elements(); len(e) != 2 || e[0].Number != 1 || e[1].Kind != Null || e[1].Pointer != "/q/1" {
		t.Errorf("elements are %+v", e)
	}
}

// FuzzValue holds ParseValue against encoding/json.
func FuzzValue(f *testing.F) {
	for _, s := range []string{`[1,2.5,null]`, `{"a":["x",{"b":[true,false,null]}]}`, `"\ud83d\ude00\ud800x"`, `-1.5e-7`, `[1e400]`, packed(1, 2), `{"a":1,"a":2}`, `[[],{}]`} {
		f.Add([]byte(s))
	}
	f.Fuzz(func(t *testing.T, text []byte) {
		if s := (splitter{maxDepth: 50}); true {
			if _, fault := s.split(text); fault != nil && fault.Code == CodeParse || s.deepest > 50 {
				return
			}
		}
		got, err := ParseValue(text, "")
		if err != nil {
			var e *Error
			if !errors.As(err, &e) || e.Code != CodeInvalidParams || strings.Contains(e.Message, "no JSON") {
				t.Fatalf("JSON was refused with %v", err)
			}
			return
		}
		var want any
		if err := json.Unmarshal(text, &want); err != nil {
			t.Fatalf("taken, but %v", err)
		}
		if plain := asAny(got); !reflect.DeepEqual(plain, want) && !strings.Contains(string(text), "float64le") && !strings.Contains(string(text), `\`) {
			t.Fatalf("read as %#v, want %#v", plain, want)
		}
	})
}

// asAny turns a value into what encoding/json makes of the same text.
func asAny(v Value) any {
	switch v.Kind {
	case YesNo:
		return v.YesNo
	case Number:
		return v.Number
	case Text:
		return v.Text
	case Object:
		m := map[string]any{}
		for _, member := range v.Members {
			m[member.Name] = asAny(member.Value)
		}
		return m
	case Numbers, List:
		list := []any{}
		for _, element := range v.Elements() {
			list = append(list, asAny(element))
		}
		return list
	}
	return nil
}

func TestTextsAreReadAsEncodingJSONReadsThem(t *testing.T) {
	for _, text := range []string{`"\"\\\/\b\f\n\r\t"`, `"\u00e9\u4e2d"`, `"\ud83d\ude00!"`, `"\ud83d"`, `"\ude00\ud83d"`, `"\ud83d\n"`, `"\ud83dxy\ud83d\ud83d\ude00"`, `"é中😀"`, `""`} {
		var want string
		if err := json.Unmarshal([]byte(text), &want); err != nil {
			t.Fatal(err)
		}
		if v, err := ParseValue([]byte(text), ""); err != nil || v.Text != want {
			t.Errorf("%s was read as %q, want %q (%v)", text, v.Text, want, err)
		}
	}
}

func BenchmarkAMillionNumbers(b *testing.B) {
	random := rand.New(rand.NewPCG(1, 1))
	numbers := make(Series, 1_000_000)
	for i := range numbers {
		numbers[i] = 12 + 3*random.NormFloat64()
	}
	list, _ := json.Marshal(numbers)
	for name, values := range map[string]string{"list": string(list), "packed": packed(numbers...)} {
		body := []byte(fmt.Sprintf(`{"jsonrpc":"2.0","id":1,"method":"m","params":{"values":%s}}`, values))
		b.Run(name, func(b *testing.B) {
			b.SetBytes(int64(len(body)))
			b.ReportAllocs()
			for b.Loop() {
				s := splitter{maxDepth: 100}
				e, fault := s.split(body)
				if fault != nil {
					b.Fatal(fault)
				}
				var p struct {
					Values []float64 `json:"values"`
				}
				if err := decodeStrict(e.params, &p); err != nil || len(p.Values) != len(numbers) {
					b.Fatal(err)
				}
			}
		})
		b.Run(name+"/split alone", func(b *testing.B) {
			b.SetBytes(int64(len(body)))
			for b.Loop() {
				s := splitter{maxDepth: 100}
				if _, fault := s.split(body); fault != nil {
					b.Fatal(fault)
				}
			}
		})
	}
}
