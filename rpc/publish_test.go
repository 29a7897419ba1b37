package rpc

import (
	"encoding/base64"
	"encoding/binary"
	"encoding/json"
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
	"time"
)

// published is a sheets/publishResults as a client reads it.
type published struct {
	Method string
	Params struct {
		Book     string
		Versions map[string]int
		Cells    []struct {
			Sheet, Cell string
			Value       any
		}
		Rows []struct {
			Row      int
			Column   string
			Status   string
			Findings []struct{ Code, Cell, Message string }
		}
		Tables []struct {
			Sheet  string
			Header []string
			Rows   [][]any
		}
		Findings *[]struct{ Sheet, Code, Cell string }
	}
}

// publication reads the next message, which is one.
func (c *testClient) publication() published {
	c.t.Helper()
	var p published
	text := c.next()
	if err := json.Unmarshal([]byte(text), &p); err != nil || p.Method != publishMethod {
		c.t.Fatalf("got %.500s, want results (%v)", text, err)
	}
	return p
}

func (p published) cells() string {
	var out []string
	for _, cell := range p.Params.Cells {
		out = append(out, fmt.Sprintf("%s!%s=%v", cell.Sheet, cell.Cell, cell.Value))
	}
	return strings.Join(out, " ")
}

func (c *testClient) openSheet(book, sheet string, version int, cells string) {
	c.t.Helper()
	c.send(`{"jsonrpc":"2.0","method":"sheets/didOpen","params":{"book":%q,"sheet":%q,"version":%d,"cells":%s}}`, book, sheet, version, cells)
}

func (c *testClient) changeSheet(book, sheet string, base int, cells string) {
	c.t.Helper()
	c.send(`{"jsonrpc":"2.0","method":"sheets/didChange","params":{"book":%q,"sheet":%q,"baseVersion":%d,"version":%d,"cells":%s}}`, book, sheet, base, base+1, cells)
}

// packedNumbers is a million of a client's numbers in base64.
func packedNumbers(values []float64) string {
	raw := make([]byte, 8*len(values))
	for i, x := range values {
		binary.LittleEndian.PutUint64(raw[8*i:], math.Float64bits(x))
	}
	return base64.StdEncoding.EncodeToString(raw)
}

const oneCalculation = `[{"at":"A1","rows":[["work out","sample","> mean"],["mean-interval","minutes in Trips"]]}]`

func TestABurstOfChangesIsWorkedOutOnceForTheNewest(t *testing.T) {
	c := begin(t, Options{})
	c.initialize()
	c.openSheet("b", "Trips", 0, `[{"at":"A1","column":["minutes",0,10]}]`)
	c.openSheet("b", "Calculations", 0, oneCalculation)
	c.publication()
	const changes = 300
	var burst strings.Builder
	for v := range changes {
		burst.WriteString(frame(fmt.Sprintf(`{"jsonrpc":"2.0","method":"sheets/didChange","params":{"book":"b","sheet":"Trips","baseVersion":%d,"version":%d,"cells":[{"at":"A2","rows":[[%d]]}]}}`, v, v+1, v+1)))
	}
	c.raw(burst.String())
	last, messages := 0, 0
	for last < changes {
		p := c.publication()
		messages++
		if version := p.Params.Versions["Trips"]; version <= last {
			t.Fatalf("version %d was published after version %d", version, last)
		} else {
			last = version
		}
		// The mean of the version's own number and 10.
		if want := fmt.Sprintf("Calculations!C2=%v", (float64(last)+10)/2); p.cells() != want {
			t.Fatalf("version %d: %s, want %s", last, p.cells(), want)
		}
	}
	if messages > changes/3 {
		t.Errorf("%d changes at once were published %d times", changes, messages)
	}
	c.leave()
}

// With an hour for a pause, no change ever comes after one.
func TestABookThatNeverPausesIsPublished(t *testing.T) {
	c := begin(t, Options{settle: time.Hour})
	c.initialize()
	c.openSheet("b", "Trips", 0, `[{"at":"A1","column":["minutes",0,10]}]`)
	c.openSheet("b", "Calculations", 0, oneCalculation)
	for version := range 3 {
		p := c.publication()
		for p.Params.Versions["Trips"] < version || len(p.Params.Versions) < 2 { // on a slow machine both sheets may not be open at first
			p = c.publication()
		}
		if want := fmt.Sprintf("Calculations!C2=%v", (float64(version)+10)/2); p.cells() != want {
			t.Errorf("version %d: %s, want %s", version, p.cells(), want)
		}
		c.changeSheet("b", "Trips", version, fmt.Sprintf(`[{"at":"A2","rows":[[%d]]}]`, version+1))
	}
	c.publication()
	c.leave()
}

func TestANewerChangeStopsTheWorkOnAnOlder(t *testing.T) {
	c := begin(t, Options{})
	c.initialize()
	const row = `["bootstrap-interval","3; 1; 4; 1; 5; 9; 2; 6; 5; 3; 5; 8; 9; 7; 9; 3; 2; 3; 8; 4; 6; 2; 6; 4","median",%d]`
	rows := func(resamples int) string {
		return strings.TrimSuffix(strings.Repeat(fmt.Sprintf(row, resamples)+",", 200), ",")
	}
	c.openSheet("b", "Calculations", 0, `[{"at":"A1","rows":[["work out","sample","of","resamples","> estimate","> note"],`+rows(1_000_000)+`]}]`)
	time.Sleep(4 * settle) // so that the work has begun; where it has not, the test is only easier to pass
	start := time.Now()
	c.changeSheet("b", "Calculations", 0, `[{"at":"A2","rows":[`+rows(200)+`]}]`)
	if p := c.publication(); p.Params.Versions["Calculations"] != 1 {
		t.Errorf("version %d was published", p.Params.Versions["Calculations"])
	}
	// Two hundred rows of a million resamples take longer than the test waits for anything.
	if waited := time.Since(start); waited > patience/2 {
		t.Errorf("the newer version waited %v", waited)
	}
	c.leave()
}

func TestABookThatIsClosedIsNotPublished(t *testing.T) {
	c := begin(t, Options{})
	c.initialize()
	for range 50 {
		c.openSheet("b", "Trips", 0, `[{"at":"A1","column":["minutes",0,10]}]`)
		c.openSheet("b", "Calculations", 0, oneCalculation)
		c.send(`{"jsonrpc":"2.0","method":"sheets/didClose","params":{"book":"b"}}`)
	}
	c.send(`{"jsonrpc":"2.0","id":1,"method":"functions/answer","params":{"name":"mean-interval","arguments":{"sample":"minutes in Trips"},"book":"b"}}`)
	for {
		// On a slow machine a book may have settled before it was closed.
		if text := c.next(); strings.Contains(text, `"id":1`) {
			if !strings.Contains(text, "no book of that name is open") {
				t.Errorf("the book is still open: %s", text)
			}
			break
		}
	}
	c.openSheet("other", "Calculations", 3, oneCalculation)
	if p := c.publication(); p.Params.Book != "other" {
		t.Errorf("the closed book was published after its closing: %+v", p)
	}
	c.leave()
}

func TestBooksDoNotMeet(t *testing.T) {
	c := begin(t, Options{})
	c.initialize()
	for i, book := range []string{"one", "two", "three"} {
		c.openSheet(book, "Trips", 0, fmt.Sprintf(`[{"at":"A1","column":["minutes",%d,%d]}]`, i, i+2))
		c.openSheet(book, "Calculations", 0, oneCalculation)
	}
	want := map[string]string{"one": "Calculations!C2=1", "two": "Calculations!C2=2", "three": "Calculations!C2=3"}
	for range 3 {
		p := c.publication()
		if p.cells() != want[p.Params.Book] {
			t.Errorf("%s: %s", p.Params.Book, p.cells())
		}
		delete(want, p.Params.Book)
	}
	c.changeSheet("two", "Trips", 0, `[{"at":"A2","rows":[[5]]}]`)
	if p := c.publication(); p.Params.Book != "two" || p.cells() != "Calculations!C2=4" {
		t.Errorf("%s: %s", p.Params.Book, p.cells())
	}
	c.leave()
}

func TestTableSheetsArePublishedWhole(t *testing.T) {
	c := begin(t, Options{})
	c.initialize()
	c.openSheet("b", "Trips", 0, `[{"at":"A1","rows":[["depot","minutes"],["North",1],["North",3],["Quay",5],["Quay",9]]}]`)
	c.openSheet("b", "Calculations", 0, `[{"at":"A1","rows":[["work out","sample","table sheet","> note"],["mean-interval","minutes in Trips for each depot","By depot"]]}]`)
	p := c.publication()
	if len(p.Params.Tables) != 1 || p.Params.Tables[0].Sheet != "By depot" || len(p.Params.Tables[0].Rows) != 2 || p.Params.Tables[0].Header[0] != "depot" ||
		p.Params.Tables[0].Rows[1][0] != "Quay" || p.Params.Tables[0].Rows[1][1] != 7.0 {
		t.Fatalf("%+v", p.Params.Tables)
	}
	// The client makes the sheet; it stays ours to write.
	c.openSheet("b", "By depot", 0, `[{"at":"A1","rows":[["depot","mean"],["North",2],["Quay",7]]}]`)
	if p := c.publication(); len(p.Params.Cells)+len(p.Params.Rows)+len(p.Params.Tables) != 0 {
		t.Errorf("making the sheet altered something: %+v", p.Params)
	}
	c.changeSheet("b", "Trips", 0, `[{"at":"B2","rows":[[2]]}]`)
	if p := c.publication(); len(p.Params.Tables) != 1 || p.Params.Tables[0].Rows[0][1] != 2.5 {
		t.Errorf("%+v", p.Params)
	}
	c.leave()
}

func TestRowsOfBlocksSideBySideAreToldApart(t *testing.T) {
	c := begin(t, Options{settle: time.Millisecond})
	c.initialize()
	c.openSheet("b", "Calculations", 0, `[{"at":"A1","rows":[["work out","sample","> mean",null,"work out","sample","> mean"],
		["mean-interval","3; 5; 7; 9; 11",null,null,"mean-interval","3; x"]]}]`)
	p := c.publication()
	if rows := p.Params.Rows; len(rows) != 2 || rows[0].Column != "A" || rows[0].Status != "ok" || rows[1].Column != "E" || rows[1].Status != "refused" {
		t.Errorf("told %+v", rows)
	}
	c.changeSheet("b", "Calculations", 0, `[{"at":"E2","rows":[[null,null]]}]`)
	p = c.publication()
	if rows := p.Params.Rows; len(rows) != 1 || rows[0].Column != "E" || rows[0].Row != 2 || rows[0].Status != "" {
		t.Errorf("told %+v", rows)
	}
	c.leave()
}

func TestFindingsAboutTheLayoutAreToldWhenTheyAlter(t *testing.T) {
	c := begin(t, Options{})
	c.initialize()
	c.openSheet("b", "Calculations", 0, `[{"at":"A1","rows":[["work out","sample"],["mean-interval","3; 5"]]}]`)
	p := c.publication()
	if p.Params.Findings == nil || len(*p.Params.Findings) != 1 || (*p.Params.Findings)[0].Sheet != "Calculations" {
		t.Fatalf("%+v", p.Params)
	}
	c.changeSheet("b", "Calculations", 0, `[{"at":"B2","rows":[["3; 6"]]}]`)
	if p := c.publication(); p.Params.Findings != nil {
		t.Errorf("the same findings came again: %+v", *p.Params.Findings)
	}
	c.changeSheet("b", "Calculations", 1, `[{"at":"C1","rows":[["> mean"]]}]`)
	if p := c.publication(); p.Params.Findings == nil || len(*p.Params.Findings) != 0 || p.cells() != "Calculations!C2=4.5" {
		t.Errorf("%+v", p.Params)
	}
	c.leave()
}

// A million cells, of which one changes: only what reads it is published.
func TestOneCellOfAMillion(t *testing.T) {
	c := begin(t, Options{})
	c.initialize()
	random := rand.New(rand.NewPCG(1, 2))
	values := make([]float64, 1_000_000)
	for i := range values {
		values[i] = 20 + random.Float64()
	}
	c.openSheet("b", "Trips", 0, `[{"at":"A1","rows":[["minutes","parcels"]]},{"at":"A2","column":{"float64le":"`+packedNumbers(values)+`"}},{"at":"B2","column":[3,5]}]`)
	c.openSheet("b", "Calculations", 0, `[{"at":"A1","rows":[["work out","sample","> mean"],["mean-interval","minutes in Trips"],["mean-interval","parcels in Trips"],["mean-interval","Trips!A2:A3"]]}]`)
	if p := c.publication(); len(p.Params.Cells) != 3 {
		t.Fatalf("%+v", p.Params)
	}
	c.changeSheet("b", "Trips", 0, `[{"at":"B3","rows":[[9]]}]`)
	if p := c.publication(); p.cells() != "Calculations!C3=6" {
		t.Errorf("%s", p.cells())
	}
	c.changeSheet("b", "Trips", 1, `[{"at":"A2","rows":[[1000020]]},{"at":"A3","rows":[[20]]}]`)
	p := c.publication()
	if len(p.Params.Cells) != 2 || p.Params.Cells[1].Cell != "C4" || p.Params.Cells[1].Value != 500020.0 {
		t.Errorf("%s", p.cells())
	}
	c.leave()
}
