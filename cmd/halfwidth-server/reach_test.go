package main

import (
	"bufio"
	"encoding/base64"
	"encoding/binary"
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"runtime"
	"slices"
	"strconv"
	"strings"
	"testing"
	"time"
)

// BenchmarkReach measures what a client meets, against plain programs on the
// same machine at the same moment, as medians of interleaved pairs:
//
//	go test ./cmd/halfwidth-server -run '^$' -bench Reach -benchtime 1x -v
//
// It prints each ratio with the one to be reached. Python's part needs python3.
func BenchmarkReach(b *testing.B) {
	r := &reach{B: b, server: filepath.Join(b.TempDir(), "halfwidth-server")}
	if runtime.GOOS == "windows" {
		r.server += ".exe"
	}
	if out, err := exec.Command("go", "build", "-o", r.server, ".").CombinedOutput(); err != nil {
		b.Fatalf("%v: %s", err, out)
	}
	for b.Loop() {
		r.start()
		r.oneByOne()
		r.inFlight()
		r.numbers()
		r.besideLongOnes()
		r.oneCell()
	}
}

type reach struct {
	*testing.B
	server string
}

// report prints a figure beside what is to be reached.
func (r *reach) report(name string, value float64, unit, want string) {
	r.Logf("%-58s %8.3g %-10s to reach: %s", name, value, unit, want)
}

func median(values []float64) float64 {
	slices.Sort(values)
	return values[len(values)/2]
}

// timed gives the seconds that work takes.
func timed(work func()) float64 {
	start := time.Now()
	work()
	return time.Since(start).Seconds()
}

func (r *reach) fail(err error) {
	if err != nil {
		r.Helper()
		r.Fatal(err)
	}
}

func (r *reach) start() {
	var ratios []float64
	for range 21 {
		plain := timed(func() { r.fail(exec.Command("cat", os.DevNull).Run()) })
		ours := timed(func() { r.fail(exec.Command(r.server, "--version").Run()) })
		ratios = append(ratios, ours/plain)
	}
	r.report("start to end, server to cat", median(ratios), "x", "at most 4")
}

// peer is a process that is written to and read from.
type peer struct {
	*reach
	cmd *exec.Cmd
	in  io.WriteCloser
	out *bufio.Reader
}

func (r *reach) open(name string, args ...string) *peer {
	r.Helper()
	p := &peer{reach: r, cmd: exec.Command(name, args...)}
	in, err := p.cmd.StdinPipe()
	r.fail(err)
	out, err := p.cmd.StdoutPipe()
	r.fail(err)
	r.fail(p.cmd.Start())
	p.in, p.out = in, bufio.NewReaderSize(out, 1<<16)
	return p
}

func (r *reach) openServer(args ...string) *peer {
	p := r.open(r.server, args...)
	p.send(initialize)
	p.next()
	return p
}

func (p *peer) send(body string) {
	_, err := io.WriteString(p.in, frame(body))
	p.fail(err)
}

func (p *peer) next() string {
	header, err := p.out.ReadString('\n')
	p.fail(err)
	length, err := strconv.Atoi(strings.TrimSuffix(strings.TrimPrefix(header, "Content-Length: "), "\r\n"))
	p.fail(err)
	_, err = p.out.Discard(len("\r\n"))
	p.fail(err)
	body := make([]byte, length)
	_, err = io.ReadFull(p.out, body)
	p.fail(err)
	return string(body)
}

func (p *peer) until(part string) string {
	for {
		if body := p.next(); strings.Contains(body, part) {
			return body
		}
	}
}

func (p *peer) end() {
	p.in.Close()
	_, _ = io.Copy(io.Discard, p.out)
	_ = p.cmd.Wait() // 1, as there was no shutdown
}

const quick = `{"jsonrpc":"2.0","id":%d,"method":"functions/answer","params":{"name":"standard-score","arguments":{"value":12,"mean":10,"sd":2}}}`

func (r *reach) oneByOne() {
	echo, server := r.open("cat"), r.openServer()
	defer echo.end()
	defer server.end()
	trips := func(p *peer) func() {
		return func() {
			for i := range 500 {
				p.send(fmt.Sprintf(quick, i))
				p.next()
			}
		}
	}
	var ratios []float64
	for range 9 {
		plain := timed(trips(echo))
		ratios = append(ratios, plain/timed(trips(server)))
	}
	r.report("calls one by one, rate to that of cat", median(ratios), "x", "at least 0.25")
}

func (r *reach) inFlight() {
	server := r.openServer()
	defer server.end()
	var requests strings.Builder
	for i := range 1000 {
		requests.WriteString(frame(fmt.Sprintf(quick, i)))
	}
	var replies []string
	exchange := func() {
		go func() { _, _ = io.WriteString(server.in, requests.String()) }()
		replies = replies[:0]
		for range 1000 {
			replies = append(replies, server.next())
		}
	}
	exchange()
	file := r.file(strings.Join(replies, "\n"))
	var ratios []float64
	for range 9 {
		ours := timed(exchange)
		ratio := r.python(`import json,sys,time
replies=[json.loads(l) for l in open(sys.argv[1])]
one=sys.argv[2]
t=time.perf_counter()
for x in replies: json.loads(one); json.dumps(x)
print(time.perf_counter()-t)`, file, fmt.Sprintf(quick, 500)) / ours
		ratios = append(ratios, ratio)
	}
	r.report("1000 calls in flight, rate to Python's json alone", median(ratios), "x", "at least 0.35")
}

func (r *reach) file(text string) string {
	name := filepath.Join(r.TempDir(), "input")
	r.fail(os.WriteFile(name, []byte(text), 0o600))
	return name
}

// python runs a script and gives the seconds that it printed; NaN where there
// is no python3.
func (r *reach) python(script string, args ...string) float64 {
	if _, err := exec.LookPath("python3"); err != nil {
		return math.NaN()
	}
	out, err := exec.Command("python3", append([]string{"-c", script}, args...)...).Output()
	r.fail(err)
	seconds, err := strconv.ParseFloat(strings.TrimSpace(string(out)), 64)
	r.fail(err)
	return seconds
}

func millionValues() []float64 {
	random := rand.New(rand.NewPCG(1, 1))
	values := make([]float64, 1_000_000)
	for i := range values {
		values[i] = 12 + 3*random.NormFloat64()
	}
	return values
}

func packed(values []float64) string {
	raw := make([]byte, 0, 8*len(values))
	for _, x := range values {
		raw = binary.LittleEndian.AppendUint64(raw, math.Float64bits(x))
	}
	return `{"float64le":"` + base64.StdEncoding.EncodeToString(raw) + `"}`
}

func array(values []float64) string {
	b := []byte{'['}
	for i, x := range values {
		if i > 0 {
			b = append(b, ',')
		}
		b = strconv.AppendFloat(b, x, 'g', -1, 64)
	}
	return string(append(b, ']'))
}

func (r *reach) numbers() {
	values := millionValues()
	body := func(list string) string {
		return `{"jsonrpc":"2.0","id":5,"method":"functions/answer","params":{"name":"mean-interval","arguments":{"checks":false,"sample":` + list + `}}}`
	}
	asArray, asPacked := body(array(values)), body(packed(values))
	file := r.file(asArray)
	server := r.openServer()
	ask := func(p *peer, request string) func() {
		return func() {
			p.send(request)
			p.until(`"id":5,"result"`)
		}
	}
	var arrays, packs []float64
	for range 7 {
		loads := r.python(`import json,sys,time
s=open(sys.argv[1]).read()
t=time.perf_counter()
json.loads(s)
print(time.perf_counter()-t)`, file)
		arrays = append(arrays, timed(ask(server, asArray))/loads)
		packs = append(packs, timed(ask(server, asPacked))/loads)
	}
	server.end()
	r.report("1e6 numbers as an array, to Python's json.loads", median(arrays), "x", "at most 1.2")
	r.report("1e6 numbers as float64le, to json.loads of the array", median(packs), "x", "at most 1.2")
	for _, way := range []struct{ name, request string }{{"array", asArray}, {"float64le", asPacked}, {"array with gaps", body(strings.Replace(strings.ReplaceAll(array(values), "5,", "5,null,"), "[", "[null,", 1))}} {
		one := r.openServer()
		before := one.peak()
		ask(one, way.request)()
		r.report("peak memory a request byte, "+way.name, (one.peak()-before)/float64(len(way.request)), "bytes", "at most 6")
		one.end()
	}
}

// peak is the most memory that the process has held, in bytes; NaN where the
// system does not tell.
func (p *peer) peak() float64 {
	text, err := os.ReadFile(fmt.Sprintf("/proc/%d/status", p.cmd.Process.Pid))
	if err != nil {
		return math.NaN()
	}
	_, rest, _ := strings.Cut(string(text), "VmHWM:")
	kilobytes, err := strconv.ParseFloat(strings.Fields(rest)[0], 64)
	p.fail(err)
	return 1024 * kilobytes
}

func (r *reach) besideLongOnes() {
	server := r.openServer()
	defer server.end()
	long := `{"jsonrpc":"2.0","id":"%d","method":"functions/answerMany","params":{"calls":[` +
		strings.Repeat(`{"name":"bootstrap-interval","arguments":{"sample":[3,1,4,1,5,9,2,6],"of":"median","resamples":100000}},`, 400) +
		`{"name":"standard-score","arguments":{"value":1,"mean":0,"sd":1}}]}}`
	var calls, cancels []float64
	for i := range 2 * runtime.NumCPU() {
		server.send(fmt.Sprintf(long, i))
	}
	for i := range 100 {
		calls = append(calls, 1e3*timed(func() {
			server.send(fmt.Sprintf(quick, i))
			server.until(fmt.Sprintf(`"id":%d,"result"`, i))
		}))
	}
	for i := range 15 {
		next := i + 2*runtime.NumCPU()
		server.send(fmt.Sprintf(long, next)) // so that every core goes on working
		cancels = append(cancels, 1e3*timed(func() {
			server.send(fmt.Sprintf(`{"jsonrpc":"2.0","method":"$/cancelRequest","params":{"id":"%d"}}`, i))
			server.until(fmt.Sprintf(`"id":"%d","error":{"code":-32800`, i))
		}))
	}
	r.report("a quick call beside long ones on every core, median", median(calls), "ms", "at most 5")
	r.report("the same, 95 of 100", calls[95], "ms", "at most 5")
	r.report("cancel to reply with every core at work, median", median(cancels), "ms", "at most 10")
}

// oneCell changes one cell of a million, beside which ten rows of a calculation
// sheet read them all and one reads a few.
func (r *reach) oneCell() {
	values := packed(millionValues())
	server := r.openServer()
	defer server.end()
	sheet := func(name, rest string) {
		server.send(fmt.Sprintf(`{"jsonrpc":"2.0","method":"sheets/didOpen","params":{"book":"b","sheet":%q,"version":0,"cells":%s}}`, name, rest))
	}
	opened := timed(func() {
		sheet("Trips", `[{"at":"A1","rows":[["minutes","parcels"]]},{"at":"A2","column":`+values+`},{"at":"B2","column":[3,5,8,9,7]}]`)
		server.send(fmt.Sprintf(quick, 1))
		server.until(`"id":1,"result"`)
	})
	var rows strings.Builder
	for i := range 10 {
		fmt.Fprintf(&rows, `,["mean-interval","minutes in Trips where minutes > %d"]`, i)
	}
	whole := timed(func() {
		sheet("Calculations", `[{"at":"A1","rows":[["work out","sample","> mean"],["mean-interval","parcels in Trips"]`+rows.String()+`]}]`)
		server.until("publishResults")
	})
	var ratios, waits []float64
	for version := range 15 {
		changed := timed(func() {
			server.send(fmt.Sprintf(`{"jsonrpc":"2.0","method":"sheets/didChange","params":{"book":"b","sheet":"Trips","baseVersion":%d,"version":%d,"cells":[{"at":"B3","rows":[[%d]]}]}}`, version, version+1, version+20))
			server.until(fmt.Sprintf(`"Trips":%d}`, version+1))
		})
		ratios, waits = append(ratios, changed/whole), append(waits, 1e3*changed)
	}
	r.report("a million cells opened", 1e3*opened, "ms", "none set")
	r.report("one cell of a million changed, to the whole worked out", median(ratios), "x", "what depends on it alone: 1/11 of the rows")
	r.report("the same, change to results (15 ms to settle among them)", median(waits), "ms", "none set")
}
