package main

import (
	"bufio"
	"fmt"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strconv"
	"strings"
)

// server measures requests that arrive all at once, and a long list.
func (b *bench) server(page *strings.Builder) error {
	calls := 50_000 / b.scale
	const one = `{"jsonrpc":"2.0","id":%d,"method":"functions/answer","params":{"name":"standard-score","arguments":{"value":12,"mean":10,"sd":2}}}`
	requests, err := b.session(calls, func(i int) string { return fmt.Sprintf(one, i) })
	if err != nil {
		return err
	}
	random := rand.New(rand.NewPCG(1, 1))
	list := []byte{'['}
	for i := range 1_000_000 / b.scale {
		if i > 0 {
			list = append(list, ',')
		}
		list = strconv.AppendFloat(list, 12+3*random.NormFloat64(), 'g', -1, 64)
	}
	list = append(list, ']')
	long, err := b.session(1, func(i int) string {
		return fmt.Sprintf(`{"jsonrpc":"2.0","id":%d,"method":"functions/answer","params":{"name":"mean-interval","arguments":{"checks":false,"sample":%s}}}`, i, list)
	})
	if err != nil {
		return err
	}
	fmt.Fprintf(page, "## The server\n\n%s requests for a standard score, and one for an interval of %s numbers, on standard input at once. One floor reads frames and\n"+
		"writes them back; the other is Python's json, which reads each request and writes a reply of a result and nothing else.\n\n"+
		"| requests | server / echo of frames | server / Python's json |\n| --- | ---: | ---: |\n", thousands(calls), thousands(1_000_000/b.scale))
	code := b.file(".py")
	if err := os.WriteFile(code, []byte(jsonScript), 0o600); err != nil {
		return err
	}
	for _, s := range []struct{ name, input string }{{"many short ones", requests}, {"one long list", long}} {
		server := job{program: b.serverProgram, input: s.input}
		echo, err := b.ratio(b.pairs, server, job{program: os.Args[0], role: "echo", input: s.input})
		if err != nil {
			return err
		}
		by := notMeasured
		if b.hasPython("json") {
			ratio, err := b.ratio(b.pairs, server, job{program: b.python, args: []string{code}, input: s.input})
			if err != nil {
				return err
			}
			by = figure(ratio)
		}
		fmt.Fprintf(page, "| %s | %s | %s |\n", s.name, figure(echo), by)
	}
	page.WriteByte('\n')
	return nil
}

const jsonScript = `import sys, json
read, write = sys.stdin.buffer, sys.stdout.buffer
while True:
    header = read.readline()
    if not header:
        break
    read.readline()
    request = json.loads(read.read(int(header[15:])))
    reply = json.dumps({"jsonrpc": "2.0", "id": request.get("id"), "result": {"status": "ok", "results": {"score": 1.0}, "findings": []}}).encode()
    write.write(b"Content-Length: %d\r\n\r\n" % len(reply) + reply)
`

// session writes the frames of a whole session to a file.
func (b *bench) session(calls int, call func(int) string) (string, error) {
	path := b.file(".frames")
	f, err := os.Create(path)
	if err != nil {
		return "", err
	}
	defer f.Close()
	w := bufio.NewWriter(f)
	send := func(body string) { fmt.Fprintf(w, "Content-Length: %d\r\n\r\n%s", len(body), body) }
	send(`{"jsonrpc":"2.0","id":"first","method":"initialize","params":{"processId":null,"capabilities":{}}}`)
	send(`{"jsonrpc":"2.0","method":"initialized","params":{}}`)
	for i := range calls {
		send(call(i))
	}
	send(`{"jsonrpc":"2.0","id":"last","method":"shutdown"}`)
	send(`{"jsonrpc":"2.0","method":"exit"}`)
	return path, w.Flush()
}

// kernel measures what the catalogue adds to the formula.
func (b *bench) kernel(page *strings.Builder) error {
	n := strconv.Itoa(max(4, 400/b.scale))
	t, err := b.times(b.pairs, as("values", n), as("plain", n), as("interval", n), as("checked", n))
	if err != nil {
		return err
	}
	floor := max(t[1]-t[0], 1e-4)
	fmt.Fprintf(page, "## The numbers themselves\n\nA t interval of the mean of %s values, through the catalogue, over the bare loops: a mean, a standard deviation and a quantile,\n"+
		"uncompensated and unchecked. What the making of the values takes is taken off both.\n\n| through the catalogue | ratio to the loops |\n| --- | ---: |\n"+
		"| without the automatic cautions | %s |\n| with them | %s |\n\n", thousands(valuesOnce), figure((t[2]-t[0])/floor), figure((t[3]-t[0])/floor))
	return nil
}

// growth measures the time for each row, question or file at growing sizes.
func (b *bench) growth(page *strings.Builder) error {
	fmt.Fprint(page, "## Growth\n\nTime for each row, question or file, over that at the size marked 1, with what the least size takes taken off. Where a\n"+
		"job grows no faster than its size, no figure after that passes 1 by much. What is mostly the start is not told apart from it.\n\n")
	kinds := []struct {
		name  string
		least int
		sizes []int
		make  func(n int) ([]string, error)
	}{
		{"rows of a data sheet", 10, []int{1_000, 10_000, 100_000, 1_000_000}, func(n int) ([]string, error) {
			path := b.file(".xlsx")
			return []string{path}, b.book(path, layout{rows: n, columns: 5, questions: 10})
		}},
		{"rows of a data file (csv)", 10, []int{1_000, 10_000, 100_000, 1_000_000}, func(n int) ([]string, error) {
			path := b.file(".calculations.csv")
			return []string{path}, b.text(path, n)
		}},
		{"questions", 1, []int{10, 100, 1_000, 10_000}, func(n int) ([]string, error) {
			path := b.file(".xlsx")
			return []string{path}, b.book(path, layout{rows: 1_000, columns: 5, questions: n})
		}},
		{"files", 1, []int{10, 30, 100, 300}, func(n int) ([]string, error) {
			dir := b.file("")
			if err := os.Mkdir(dir, 0o700); err != nil {
				return nil, err
			}
			for i := range n {
				if err := b.book(filepath.Join(dir, fmt.Sprintf("book-%03d.xlsx", i)), layout{rows: 200, columns: 5, questions: 10}); err != nil {
					return nil, err
				}
			}
			return []string{dir}, nil
		}},
	}
	for _, kind := range kinds {
		var jobs []job
		for i, n := range append([]int{kind.least}, kind.sizes...) {
			if i > 0 {
				n = max(1, n/b.scale)
			}
			paths, err := kind.make(n)
			if err != nil {
				return err
			}
			jobs = append(jobs, b.fill(paths...))
		}
		t, err := b.times(b.pairs, jobs...)
		if err != nil {
			return err
		}
		first := 1
		var head, rule, line strings.Builder
		unit := (t[1+first] - t[0]) / float64(kind.sizes[first]-kind.least)
		for i, n := range kind.sizes {
			fmt.Fprintf(&head, " %s |", thousands(n))
			rule.WriteString(" ---: |")
			each := (t[1+i] - t[0]) / float64(n-kind.least)
			switch {
			case i == first:
				line.WriteString(" 1 |")
			case t[1+i] < 1.3*t[0]:
				line.WriteString(" mostly start |")
			default:
				fmt.Fprintf(&line, " %s |", figure(each/unit))
			}
		}
		fmt.Fprintf(page, "| %s |%s\n| --- |%s\n| time for each |%s\n\n", kind.name, head.String(), rule.String(), line.String())
	}
	return nil
}

// text writes a text calculation sheet over a data file of so many rows.
func (b *bench) text(path string, rows int) error {
	data := b.file(".csv")
	var lines strings.Builder
	lines.WriteString("depot,minutes,cost\n")
	random := rand.New(rand.NewPCG(1, 1))
	for range rows {
		fmt.Fprintf(&lines, "%s,%d.%02d,%v\n", depots[random.IntN(4)], random.IntN(60), random.IntN(100), random.NormFloat64())
	}
	if err := os.WriteFile(data, []byte(lines.String()), 0o600); err != nil {
		return err
	}
	name := filepath.Base(data)
	sheet := "work out,sample,> mean,> lower,> upper,> status\n" +
		strings.Repeat("mean-interval,minutes in "+name+",,,,\nmean-interval,cost in "+name+" where depot = Quay,,,,\n", 5)
	return os.WriteFile(path, []byte(sheet), 0o600)
}

// figure shows two significant digits.
func figure(x float64) string {
	switch {
	case x >= 10:
		return strconv.FormatFloat(x, 'f', 0, 64)
	case x >= 1:
		return strconv.FormatFloat(x, 'f', 1, 64)
	}
	return strconv.FormatFloat(x, 'f', 2, 64)
}

// thousands shows a whole number with commas.
func thousands(n int) string {
	s := strconv.Itoa(n)
	for i := len(s) - 3; i > 0; i -= 3 {
		s = s[:i] + "," + s[i:]
	}
	return s
}
