package main

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"slices"
	"strconv"
	"strings"
	"testing"
	"time"

	"github.com/rogpeppe/go-internal/testscript"

	"example.org/barrow/graphio"
	"example.org/barrow/graphio/graphiotest"
)

func TestMain(m *testing.M) {
	testscript.Main(m, map[string]func(){"barrow": main})
}

// TestScripts runs the scripts under testdata, each a small story of one use.
// Beside the commands of testscript they know
//
//	code N CMD…        run a command that must end with exit code N
//	nothing-left DIR   the folder holds no hidden file or folder
//	edit FILE RE NEW   replace what matches a regular expression, which must be there
//	grid [SIDE N]      write a large network and N samples: edges.csv and samples.csv
//	interrupt CMD…     run a command, send it Ctrl-C as it works: it must end with 130
//	cutoff N CMD…      run a command and kill it at random moments, N times; each goes
//	                   on where the last was killed
//	together CMD…      run a command twice at once: one must refuse, the other end well
func TestScripts(t *testing.T) {
	scripts, err := filepath.Glob("testdata/*.txtar")
	if err != nil || len(scripts) == 0 {
		t.Fatal("no scripts found")
	}
	testscript.Run(t, testscript.Params{
		Dir: "testdata",
		Cmds: map[string]func(*testscript.TestScript, bool, []string){
			"code": wantCode, "nothing-left": nothingLeft, "interrupt": interrupt, "grid": writeGrid, "edit": edit,
			"cutoff": cutoff, "together": together,
		},
	})
}

func wantCode(ts *testscript.TestScript, neg bool, args []string) {
	want, err := strconv.Atoi(args[0])
	if err != nil || neg || len(args) < 2 {
		ts.Fatalf("usage: code N CMD…")
	}
	got := 0
	var exit *exec.ExitError
	if err := ts.Exec(args[1], args[2:]...); errors.As(err, &exit) {
		got = exit.ExitCode()
	} else if err != nil {
		ts.Fatalf("%v", err)
	}
	if got != want {
		ts.Fatalf("exit code %d, want %d", got, want)
	}
}

func nothingLeft(ts *testscript.TestScript, neg bool, args []string) {
	if left := hiddenIn(ts.MkAbs(args[0])); len(left) > 0 {
		ts.Fatalf("left behind: %v", left)
	}
}

func hiddenIn(dir string) []string {
	entries, err := os.ReadDir(dir)
	if err != nil {
		return []string{err.Error()}
	}
	var list []string
	for _, e := range entries {
		if strings.HasPrefix(e.Name(), ".") && e.Name() != ".tmp" { // testscript's own
			list = append(list, e.Name())
		}
	}
	return list
}

// interrupt waits until the command has begun to work, which its hidden folder
// shows.
func interrupt(ts *testscript.TestScript, neg bool, args []string) {
	path, err := exec.LookPath(args[0])
	ts.Check(err)
	cmd := exec.Command(path, args[1:]...)
	cmd.Dir = ts.MkAbs(".")
	var stderr bytes.Buffer
	cmd.Stderr = &stderr
	ts.Check(cmd.Start())
	for begin := time.Now(); len(hiddenIn(cmd.Dir)) == 0; time.Sleep(5 * time.Millisecond) {
		if time.Since(begin) > time.Minute {
			cmd.Process.Kill()
			ts.Fatalf("no sign of work after a minute; stderr: %s", &stderr)
		}
	}
	time.Sleep(50 * time.Millisecond)
	ts.Check(cmd.Process.Signal(os.Interrupt))
	var exit *exec.ExitError
	if err := cmd.Wait(); !errors.As(err, &exit) || exit.ExitCode() != interrupted {
		ts.Fatalf("ended with %v, want exit code %d; stderr: %s", err, interrupted, &stderr)
	}
	if !strings.Contains(stderr.String(), "interrupted") {
		ts.Fatalf("stderr: %s", &stderr)
	}
}

func edit(ts *testscript.TestScript, neg bool, args []string) {
	path := ts.MkAbs(args[0])
	text, err := os.ReadFile(path)
	ts.Check(err)
	changed := regexp.MustCompile(args[1]).ReplaceAll(text, []byte(args[2]))
	if bytes.Equal(changed, text) {
		ts.Fatalf("nothing in %s matches %s", args[0], args[1])
	}
	ts.Check(os.WriteFile(path, changed, 0o644))
}

// writeGrid writes a network and samples that keep the solver busy for long.
func writeGrid(ts *testscript.TestScript, neg bool, args []string) {
	side, samples := 150, 40
	if len(args) == 2 {
		var err error
		side, err = strconv.Atoi(args[0])
		ts.Check(err)
		samples, err = strconv.Atoi(args[1])
		ts.Check(err)
	}
	var edges, values strings.Builder
	edges.WriteString("from,to,length\n")
	values.WriteString("sample,node,value\n")
	s := uint32(1)
	next := func(n uint32) string {
		s = s*1664525 + 1013904223 // Numerical Recipes' generator: any will do
		return strconv.Itoa(int(1 + s>>8%n))
	}
	name := func(i, j int) string { return strconv.Itoa(i) + "-" + strconv.Itoa(j) }
	for i := range side {
		for j := range side {
			if i+1 < side {
				edges.WriteString(name(i, j) + "," + name(i+1, j) + "," + next(100) + "\n")
			}
			if j+1 < side {
				edges.WriteString(name(i, j) + "," + name(i, j+1) + "," + next(100) + "\n")
			}
			for k := range samples {
				values.WriteString("s" + strconv.Itoa(k) + "," + name(i, j) + "," + next(1000) + "\n")
			}
		}
	}
	ts.Check(os.WriteFile(ts.MkAbs("edges.csv"), []byte(edges.String()), 0o644))
	ts.Check(os.WriteFile(ts.MkAbs("samples.csv"), []byte(values.String()), 0o644))
}

// cutoff starts a command again and again and kills it after ever longer times,
// so that it dies in all its stages.
func cutoff(ts *testscript.TestScript, neg bool, args []string) {
	times, err := strconv.Atoi(args[0])
	ts.Check(err)
	path, err := exec.LookPath(args[1])
	ts.Check(err)
	for k := range times {
		cmd := exec.Command(path, args[2:]...)
		cmd.Dir = ts.MkAbs(".")
		ts.Check(cmd.Start())
		time.Sleep(time.Duration(40+120*k) * time.Millisecond)
		for begin := time.Now(); k == times-1 && !journalled(cmd.Dir); time.Sleep(5 * time.Millisecond) {
			if time.Since(begin) > time.Minute {
				ts.Fatalf("nothing in a journal after a minute")
			}
		}
		cmd.Process.Kill()
		cmd.Wait()
	}
}

// journalled reports whether a journal has more in it than what run it is of.
func journalled(dir string) bool {
	list, _ := filepath.Glob(filepath.Join(dir, "*.journal"))
	for _, path := range list {
		if info, err := os.Stat(path); err == nil && info.Size() > 200 {
			return true
		}
	}
	return false
}

// together starts a command and, while it holds its folder, the same again.
func together(ts *testscript.TestScript, neg bool, args []string) {
	path, err := exec.LookPath(args[0])
	ts.Check(err)
	first := exec.Command(path, args[1:]...)
	first.Dir = ts.MkAbs(".")
	ts.Check(first.Start())
	for begin := time.Now(); len(hiddenIn(first.Dir)) < 2; time.Sleep(5 * time.Millisecond) { // lock and staging
		if time.Since(begin) > time.Minute {
			ts.Fatalf("no sign of work after a minute")
		}
	}
	second := exec.Command(path, args[1:]...)
	second.Dir = first.Dir
	text, err := second.CombinedOutput()
	if err == nil || !strings.Contains(string(text), "another run is at work on it") {
		ts.Fatalf("the second run: %v, %s", err, text)
	}
	ts.Check(first.Wait())
}

// The help texts say what is so: their examples run, each flag they list is
// taken, and each flag taken is listed.
func TestHelpIsTrue(t *testing.T) {
	t.Chdir(t.TempDir())
	call := func(args ...string) (string, string, int) {
		var stdout, stderr bytes.Buffer
		code := run(args, strings.NewReader(""), &stdout, &stderr)
		return stdout.String(), stderr.String(), code
	}
	if _, stderr, code := call("demo", "harbour"); code != 0 {
		t.Fatalf("demo ended with %d: %s", code, stderr)
	}
	examples := 0
	for _, c := range commands {
		for line := range strings.Lines(c.help) {
			if example, found := strings.CutPrefix(strings.TrimSpace(line), "barrow "); found && strings.HasPrefix(line, "  barrow ") {
				examples++
				if _, stderr, code := call(strings.Fields(example)...); code != 0 {
					t.Errorf("barrow %s ended with %d: %s", example, code, stderr)
				}
			}
		}
		for line := range strings.Lines(c.help) {
			if len(line) > 89 && !strings.HasPrefix(line, "  barrow ") {
				t.Errorf("%s --help has a line of %d letters: %s", c.name, len(line), line)
			}
			if words := strings.Fields(line); len(words) > 1 && strings.HasPrefix(line, "  --") {
				_, stderr, _ := call(c.name, words[0]+"=\x00")
				if strings.Contains(stderr, "unknown flag") {
					t.Errorf("%s --help lists %s, which it does not take", c.name, words[0])
				}
			}
		}
	}
	if examples < len(commands) {
		t.Errorf("%d examples for %d commands", examples, len(commands))
	}
	for command, flags := range map[string][]string{"matrix": recordedFlags(t, "town"), "pair": recordedFlags(t, "bridge"),
		"test": recordedFlags(t, "weeks"), "noise": recordedFlags(t, "noise"), "shape": recordedFlags(t, "shape"), "series": recordedFlags(t, "course")} {
		help, _, _ := call("help", command)
		for _, f := range append(flags, "out", "replace", "replay") {
			if !strings.Contains(help, "--"+f) {
				t.Errorf("%s --help does not mention --%s", command, f)
			}
		}
	}
}

func recordedFlags(t *testing.T, dir string) []string {
	text, err := os.ReadFile(filepath.Join(dir, recordFile))
	if err != nil {
		t.Fatal(err)
	}
	var r record
	if err := json.Unmarshal(text, &r); err != nil {
		t.Fatal(err)
	}
	var names []string
	for name := range r.Parameters {
		names = append(names, name)
	}
	if len(names) < 10 {
		t.Fatalf("only %v recorded in %s", names, dir)
	}
	slices.Sort(names)
	return names
}

// An interrupted pair fails, and knows what it has proved.
func TestInterruptedPairKeepsItsInterval(t *testing.T) {
	net := graphiotest.Grid(60, 60, 1)
	other := graphiotest.Smooth(net, 2)
	other.Name = "other"
	samples, err := graphio.NewSamples(net.Order(), []graphio.Sample{graphiotest.Smooth(net, 1), other})
	if err != nil {
		t.Fatal(err)
	}
	if samples, err = samples.Shares(); err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	s := &session{ctx: ctx, stdout: io.Discard, stderr: io.Discard}
	var early, whole comparison
	d := &data{net: net}
	if err := s.solveExactly(&settings{}, d, samples.At(0), samples.At(1), &early); !errors.Is(err, context.Canceled) {
		t.Fatalf("got %v, want %v", err, context.Canceled)
	}
	s.ctx = context.Background()
	if err := s.solveExactly(&settings{}, d, samples.At(0), samples.At(1), &whole); err != nil {
		t.Fatal(err)
	}
	if !early.late || !(early.lower < whole.distance && whole.distance < early.upper) {
		t.Errorf("interrupted: %v to %v, late %v; the distance is %v", early.lower, early.upper, early.late, whole.distance)
	}
	var text strings.Builder
	early.summary(&text, &settings{method: "exact"}, d)
	if !strings.Contains(text.String(), "stopped at a gap of") {
		t.Errorf("summary: %s", &text)
	}
}
