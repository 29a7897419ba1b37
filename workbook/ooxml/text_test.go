package ooxml

import (
	"bytes"
	"encoding/binary"
	"io"
	"strings"
	"testing"
	"testing/iotest"
)

// textCases are texts and how they are written as the content of an element.
var textCases = []struct{ text, written string }{
	{"North depot", "North depot"},
	{`a < b & c > "d" 'e'`, `a &lt; b &amp; c &gt; "d" 'e'`},
	{"a\tb\nc", "a\tb\nc"},
	{"a\rb\r\nc", "a_x000D_b_x000D_\nc"},
	{"\x00\x1f\uFFFE", "_x0000__x001F__xFFFE_"},
	{"_x0041_", "_x005F_x0041_"},
	{"_x005F_x0041_", "_x005F_x005F_x005F_x0041_"},
	{"_x0041\r", "_x005F_x0041_x000D_"},
	{"_x004", "_x004"},
	{"__x0041__", "__x005F_x0041__"},
	{"ä 📦 _xab_", "ä 📦 _xab_"},
	{"_xD83D_ _xDCE6_", "_x005F_xD83D_ _x005F_xDCE6_"},
}

func TestTextsAreWrittenAndReadBack(t *testing.T) {
	for _, test := range textCases {
		written := string(appendEscaped(nil, test.text))
		if written != test.written {
			t.Errorf("%q is written %q, want %q", test.text, written, test.written)
		}
		x := dataLexer([]byte("<t>"+written+"</t>"), Limits{}.WithDefaults())
		if err := x.next(); err != nil {
			t.Fatal(err)
		}
		back, err := x.elementText(nil)
		if err != nil || string(back) != test.text {
			t.Errorf("%q reads back as %q (%v), want %q", written, back, err, test.text)
		}
	}
}

func TestAttributesAreWrittenAndReadBack(t *testing.T) {
	for _, text := range []string{"North", `a<b>&"'`, "a\tb\nc\rd", "ä📦"} {
		x := dataLexer([]byte(`<t a="`+string(appendAttribute(nil, text))+`"/>`), Limits{}.WithDefaults())
		if err := x.next(); err != nil {
			t.Fatal(err)
		}
		if back, err := x.attrText("a"); err != nil || back != text {
			t.Errorf("%q reads back as %q (%v)", text, back, err)
		}
	}
	x := dataLexer([]byte("<t a='a\r\nb\tc&#10;d'/>"), Limits{}.WithDefaults())
	if err := x.next(); err != nil {
		t.Fatal(err)
	}
	if got, err := x.attrText("a"); got != "a b c\nd" || err != nil {
		t.Errorf("the attribute reads as %q (%v)", got, err)
	}
}

// What plain lets by must be the text itself; what it holds back, the general
// path must read otherwise or refuse, or the fast path would be slow for nothing.
func TestPlainTexts(t *testing.T) {
	for _, text := range []string{"", "North", "ä📦", "a\tb\nc", "a_b", "_", "a]]"} {
		if !plain([]byte(text)) {
			t.Errorf("%q is not plain", text)
		}
	}
	for _, text := range []string{"a&amp;b", "ä&amp;b", "a\rb", "ä\rb", "a_x0041_", "ä_x0041_", "a\x01", "ä\x01", "a\xFF", "\xC3", "ä\uFFFE", "ä\xED\xA0\x80"} {
		if plain([]byte(text)) {
			t.Errorf("%q is plain", text)
		}
	}
}

func TestSharedStringsOfEveryForm(t *testing.T) {
	data := `<!-- c --><sst xmlns="` + mainTransitional + `"><si><t>a</t></si> <si><t xml:space="preserve"> b </t></si><si><t>c &amp; d</t></si><si><r><t>e</t></r><r><rPr/><t>f</t></r><rPh><t>g</t></rPh></si><si/><si></si><si><t/></si>` +
		`<o:extra xmlns:o="urn:o"><si><t>no</t></si></o:extra><si><t >h</t></si><si><t>ä_x000A_</t></si><si><t><![CDATA[<i>]]></t></si></sst>`
	table, err := newStringTable([]byte(data), Limits{}.WithDefaults())
	if err != nil {
		t.Fatal(err)
	}
	var got []string
	for i := range table.items {
		got = append(got, table.string(i))
		if string(table.bytes(i)) != table.string(i) || table.empty(i) != (table.string(i) == "") {
			t.Errorf("string %d is told in two ways", i)
		}
	}
	if want := "a| b |c & d|ef||||h|ä\n|<i>"; strings.Join(got, "|") != want {
		t.Errorf("strings %q, want %q", strings.Join(got, "|"), want)
	}
	b := smallBook(rows("")).open(t)
	if n, err := b.SharedStrings(); n != 4 || err != nil {
		t.Errorf("%d shared strings (%v), want 4", n, err)
	}
	for _, i := range []int{-1, 4} {
		if _, err := b.SharedString(i); err == nil {
			t.Errorf("shared string %d exists", i)
		}
	}
	if text, err := b.CellText(&Cell{Type: TypeNumber, Number: 5}); text != "" || err != nil {
		t.Errorf("a number has the text %q (%v)", text, err)
	}
}

func TestUTF16GoesThroughUnchanged(t *testing.T) {
	text := `<a>` + strings.Repeat("North ä 📦 ", 5000) + `</a>`
	for _, order := range []byteOrder{binary.LittleEndian, binary.BigEndian} {
		data := toUTF16(text, order)
		for name, wrap := range map[string]func(io.Reader) io.Reader{"whole": func(r io.Reader) io.Reader { return r }, "by bytes": iotest.OneByteReader, "with the end": iotest.DataErrReader} {
			r, found, err := xmlReader(wrap(bytes.NewReader(data)))
			if err != nil || found != order {
				t.Fatalf("%v %s: order %v, error %v", order, name, found, err)
			}
			utf8 := readAll(t, r)
			if string(utf8) != "\uFEFF"+text {
				t.Fatalf("%v %s: the text changed", order, name)
			}
			var back bytes.Buffer
			w := &utf16Writer{dst: &back, order: order}
			for i := 0; i < len(utf8); i += 7 {
				if n, err := w.Write(utf8[i:min(i+7, len(utf8))]); err != nil || n != min(7, len(utf8)-i) {
					t.Fatal(n, err)
				}
			}
			if !bytes.Equal(back.Bytes(), data) {
				t.Fatalf("%v %s: the bytes changed", order, name)
			}
		}
	}
}
