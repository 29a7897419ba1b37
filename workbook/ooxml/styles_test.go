package ooxml

import (
	"fmt"
	"strings"
	"testing"
)

// The codes are those of ECMA-376 part 1, 18.8.30 and 18.8.31, and forms that
// the section's rules allow.
func TestFormatCodes(t *testing.T) {
	for code, want := range map[string]Format{
		"General": FormatNumber, "GENERAL": FormatNumber, "0": FormatNumber, "0.00": FormatNumber, "#,##0.00_);[Red](#,##0.00)": FormatNumber, "0.00E+00": FormatNumber, "##0.0e-0": FormatNumber, "": FormatNumber,
		`# ??/??`: FormatNumber, `0 "days"`: FormatNumber, `0\d`: FormatNumber, `_d0`: FormatNumber, `*d0`: FormatNumber, `[$€-407] #,##0`: FormatNumber, `[Yellow]0`: FormatNumber, `[<100]0;[>=100]0.0`: FormatNumber, `[DBNum1][$-804]General`: FormatNumber, `"yyyy"0`: FormatNumber, `"unclosed yyyy`: FormatNumber, `[unclosed h`: FormatNumber,
		"0%": FormatPercent, "0.00%": FormatPercent, `0.0\ %`: FormatPercent, `0"%"`: FormatNumber, `[Red]0%;-0%`: FormatPercent,
		"yyyy-mm-dd": FormatDate, "d.m.yyyy": FormatDate, "mmm": FormatDate, "mmmm yy": FormatDate, "dddd": FormatDate, "m/d/yy h:mm": FormatDate, "[$-F800]dddd, mmmm dd, yyyy": FormatDate, `yyyy"年"m"月"`: FormatDate, "ge.m.d": FormatDate, "[$-411]ggge": FormatDate, "h:mm d": FormatDate, `[=0]"-";yyyy-mm-dd`: FormatDate, "YYYY-MM-DD": FormatDate, `dd/mm/yyyy;@`: FormatDate,
		"h:mm": FormatTime, "hh:mm:ss": FormatTime, "h:mm AM/PM": FormatTime, "h:mm:ss a/p": FormatTime, "[$-F400]h:mm:ss AM/PM": FormatTime, "h": FormatTime, "h:mm:ss.000": FormatTime, "AM/PM h": FormatTime, "h am/pm": FormatTime,
		"[h]:mm": FormatElapsed, "[hh]:mm:ss": FormatElapsed, "[m]": FormatElapsed, "[mm]:ss": FormatElapsed, "[s]": FormatElapsed, "[ss].00": FormatElapsed, "mm:ss": FormatElapsed, "mm:ss.0": FormatElapsed, "ss": FormatElapsed, "[H]:MM": FormatElapsed,
		"@": FormatText, `"a "@`: FormatText, "0;-0;0;@": FormatNumber,
	} {
		if got := classifyFormat(code); got != want {
			t.Errorf("%s is %v, want %v", code, got, want)
		}
	}
}

func TestBuiltInFormats(t *testing.T) {
	for id, want := range map[int]Format{0: FormatNumber, 1: FormatNumber, 4: FormatNumber, 9: FormatPercent, 10: FormatPercent, 11: FormatNumber, 13: FormatNumber, 14: FormatDate, 17: FormatDate, 18: FormatTime, 21: FormatTime,
		22: FormatDate, 27: FormatDate, 32: FormatTime, 37: FormatNumber, 40: FormatNumber, 45: FormatElapsed, 46: FormatElapsed, 47: FormatElapsed, 48: FormatNumber, 49: FormatText, 50: FormatDate, 58: FormatDate, 164: FormatNumber} {
		if got := builtInFormat(id); got != want {
			t.Errorf("id %d is %v, want %v", id, got, want)
		}
	}
}

func stylesBook(styles string) book {
	return smallBook(rows(`<row r="1"><c r="A1" s="0"><v>1</v></c></row>`)).
		with("xl/_rels/workbook.xml.rels", relationsXML("worksheet", "worksheets/sheet1.xml", "sharedStrings", "sharedStrings.xml", "styles", "styles.xml")).
		with("xl/styles.xml", styles)
}

func TestStyles(t *testing.T) {
	styles := xmlHead + `<styleSheet xmlns="` + mainTransitional + `"><numFmts count="2"><numFmt numFmtId="164" formatCode="&quot;d&quot;0"/><numFmt numFmtId="165" formatCode="[h]:mm"/><numFmt numFmtId="9" formatCode="yyyy"/></numFmts>` +
		`<cellStyleXfs count="1"><xf numFmtId="14"/></cellStyleXfs><cellXfs count="5"><xf numFmtId="0"/><xf numFmtId="164"><alignment/></xf><xf numFmtId="165"/><xf numFmtId="14"/><xf/><xf numFmtId="9"/></cellXfs><dxfs><dxf><numFmt numFmtId="166" formatCode="yyyy"/></dxf></dxfs></styleSheet>`
	b := stylesBook(styles).open(t)
	var got []string
	for i := -1; i < 8; i++ {
		got = append(got, fmt.Sprint(b.Format(i)))
	}
	if want := "0 0 0 4 2 0 2 0 0"; strings.Join(got, " ") != want {
		t.Errorf("formats %s, want %s", strings.Join(got, " "), want)
	}
	// Style 0 is there even where the part lists none.
	if got := scanFirst(t, stylesBook(xmlHead+`<styleSheet xmlns="`+mainTransitional+`"/>`).open(t)); got != "1: A=1" {
		t.Errorf("rows %s", got)
	}
	bad := stylesBook(styles).with("xl/worksheets/sheet1.xml", rows(`<row r="1"><c r="A1" s="6"><v>1</v></c></row>`)).open(t)
	_, err := bad.Scan(0, ScanOptions{}, func(*Row) error { return nil })
	wantError(t, err, ErrDamaged, "Trips.xlsx: part xl/worksheets/sheet1.xml: sheet Trips: cell A1: the cell points to style 6, of 6")
	_, err = openBytes(stylesBook("<styles/>").bytes(t), Limits{})
	wantError(t, err, ErrDamaged, "Trips.xlsx: part xl/styles.xml: the part holds a <styles>, not styles (byte 0)")
}
