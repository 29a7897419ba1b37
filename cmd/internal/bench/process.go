package main

import (
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"runtime"
	"slices"
	"strings"
)

// bench is one run.
type bench struct {
	dir    string
	python string
	pairs  int
	scale  int // by which sizes are divided

	program, serverProgram string // halfwidth and its server
	number                 int    // of files made
}

// build builds the two programs.
func (b *bench) build() error {
	ext := ""
	if runtime.GOOS == "windows" {
		ext = ".exe"
	}
	b.program, b.serverProgram = filepath.Join(b.dir, "halfwidth"+ext), filepath.Join(b.dir, "halfwidth-server"+ext)
	for path, name := range map[string]string{b.program: "halfwidth/cmd/halfwidth", b.serverProgram: "halfwidth/cmd/halfwidth-server"} {
		if out, err := exec.Command("go", "build", "-o", path, name).CombinedOutput(); err != nil {
			return fmt.Errorf("%w: %s", err, out)
		}
	}
	return nil
}

// file names a new file.
func (b *bench) file(ending string) string {
	b.number++
	return filepath.Join(b.dir, fmt.Sprintf("file-%03d%s", b.number, ending))
}

// job is a process to measure.
type job struct {
	input   string // a file for standard input
	program string
	args    []string
	role    string
	status  int // that it ends with
}

// as is this program in a role.
func as(role string, args ...string) job {
	return job{program: os.Args[0], args: args, role: role}
}

// seconds runs a job and gives its processor time.
func (j job) seconds() (float64, error) {
	state, err := j.run()
	if err != nil {
		return 0, err
	}
	return (state.UserTime() + state.SystemTime()).Seconds(), nil
}

// peak runs a job and gives its largest memory in MiB.
func (j job) peak() (string, error) {
	state, err := j.run()
	if err != nil {
		return "", err
	}
	if mib := peakMiB(state); mib > 0 {
		return figure(mib), nil
	}
	return notMeasured, nil
}

func (j job) run() (*os.ProcessState, error) {
	c := exec.Command(j.program, j.args...)
	if j.role != "" {
		c.Env = append(os.Environ(), roleVariable+"="+j.role)
	}
	if j.input != "" {
		in, err := os.Open(j.input)
		if err != nil {
			return nil, err
		}
		defer in.Close()
		c.Stdin = in
	}
	var said strings.Builder
	c.Stderr = &said
	if err := c.Run(); err != nil && c.ProcessState.ExitCode() != j.status {
		return nil, fmt.Errorf("%s: %w: %s", c, err, said.String())
	}
	return c.ProcessState, nil
}

// ratio gives the median of what the first job takes over what the second does.
func (b *bench) ratio(pairs int, first, second job) (float64, error) {
	var ratios []float64
	for range pairs {
		one, err := first.seconds()
		if err != nil {
			return 0, err
		}
		other, err := second.seconds()
		if err != nil {
			return 0, err
		}
		ratios = append(ratios, one/max(other, 1e-4))
	}
	return median(ratios), nil
}

// times gives the median time of each job, all in turn.
func (b *bench) times(rounds int, jobs ...job) ([]float64, error) {
	all := make([][]float64, len(jobs))
	for range rounds {
		for i, j := range jobs {
			t, err := j.seconds()
			if err != nil {
				return nil, err
			}
			all[i] = append(all[i], t)
		}
	}
	out := make([]float64, len(jobs))
	for i, list := range all {
		out[i] = median(list)
	}
	return out, nil
}

func median(list []float64) float64 {
	slices.Sort(list)
	return list[len(list)/2]
}

// hasPython tells whether Python is there and has some libraries.
func (b *bench) hasPython(libraries ...string) bool {
	return exec.Command(b.python, "-c", "import "+strings.Join(append(libraries, "sys"), ", ")).Run() == nil
}

// machine describes in general terms what it was measured on.
func (b *bench) machine() string {
	memory := ""
	if text, err := os.ReadFile("/proc/meminfo"); err == nil {
		var kib int
		if _, err := fmt.Sscanf(string(text), "MemTotal: %d kB", &kib); err == nil {
			memory = fmt.Sprintf(", %d GiB of memory", (kib+1<<19)>>20)
		}
	}
	return fmt.Sprintf("Measured on %s/%s with %d cores%s and %s.\n", runtime.GOOS, runtime.GOARCH, runtime.NumCPU(), memory, runtime.Version())
}
