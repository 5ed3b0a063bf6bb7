package main

import (
	"fmt"
	"math"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"time"

	"github.com/spf13/pflag"

	"example.org/barrow/dual/pairwise"
	"example.org/barrow/graphio"
)

// settings are the values of all flags; a command registers those it takes.
type settings struct {
	flags *pflag.FlagSet

	edges, nodes, samples, groups string
	rows, columns                 string
	lengthFrom, missing           string
	directed                      bool
	bridge                        float64

	method, mass, calibrate string
	unmatched, gap          float64
	stored, hold            string
	vectors, unbiased       bool
	timeLimit               time.Duration
	test                    testFlags
	noise                   noiseFlags
	noisy                   bool   // matrix --noise
	by                      string // pair: a column of groups
	draws                   int    // pair: of its samples
	goal                    goalFlags
	from                    string  // the results folder of an earlier run
	earlier                 *stored // the same, read

	seed    uint64
	threads int
	memory  string

	out, replay string
	replace     bool
}

// Flags that say where results go and what recorded run is repeated; they are
// no part of the record.
var unrecorded = []string{"out", "replace", "replay", "help"}

// Flags that may be given beside --replay, and that change no result.
var harmless = []string{"threads", "memory", "hold"}

// Flags that name files; what they hold counts, not where it stands.
var files = []string{"edges", "nodes", "samples", "groups", "rows", "columns", "calibration", "distances", "against", "without", "add", "from"}

func newSettings(command string) *settings {
	set := &settings{flags: pflag.NewFlagSet(command, pflag.ContinueOnError), hold: "auto"}
	set.flags.SortFlags = false
	set.flags.Usage = func() {}
	return set
}

func (set *settings) input() {
	f := set.flags
	f.StringVar(&set.edges, "edges", "", "")
	f.StringVar(&set.nodes, "nodes", "", "")
	f.StringVar(&set.samples, "samples", "", "")
	f.StringVar(&set.rows, "rows", "", "")
	f.StringVar(&set.columns, "columns", "", "")
	f.BoolVar(&set.directed, "directed", false, "")
	f.StringVar(&set.lengthFrom, "length-from", "", "")
	f.Float64Var(&set.bridge, "bridge", 0, "")
	f.StringVar(&set.missing, "missing", "", "")
}

func (set *settings) comparison(method string) {
	f := set.flags
	f.StringVar(&set.method, "method", method, "")
	f.StringVar(&set.mass, "mass", "share", "")
	f.Float64Var(&set.unmatched, "unmatched", 0, "")
}

func (set *settings) running() {
	f := set.flags
	f.IntVar(&set.threads, "threads", 0, "")
	f.StringVar(&set.memory, "memory", "4GiB", "")
}

func (set *settings) results(out string) {
	f := set.flags
	f.StringVar(&set.out, "out", out, "")
	f.BoolVar(&set.replace, "replace", false, "")
	f.StringVar(&set.replay, "replay", "", "")
}

// parse reads the command line and returns what is no flag.
func (set *settings) parse(args []string) ([]string, error) {
	if err := set.flags.Parse(args); err != nil {
		text := err.Error()
		if name, found := strings.CutPrefix(text, "unknown flag: --"); found {
			var names []string
			set.flags.VisitAll(func(f *pflag.Flag) { names = append(names, "--"+f.Name) })
			text = fmt.Sprintf("unknown flag --%s%s", name, didYouMean("--"+name, names))
		}
		return nil, usageError{text}
	}
	return set.flags.Args(), nil
}

// check refuses values out of range.
func (set *settings) check() error {
	has := func(name string) bool { return set.flags.Lookup(name) != nil }
	if set.edges == "" && set.test.distances == "" {
		return usageError{"no network: want --edges FILE"}
	}
	if has("mass") {
		if err := oneOf("--mass", set.mass, "share", "amount"); err != nil {
			return err
		}
		if !(set.unmatched >= 0) || math.IsInf(set.unmatched, 0) {
			return usageError{fmt.Sprintf("--unmatched %v; want a cost of 0 or more (0: no mass is created or removed)", set.unmatched)}
		}
	}
	if has("method") {
		if set.samples == "" && set.test.distances == "" {
			return usageError{"no samples: want --samples FILE"}
		}
		if err := oneOf("--method", set.method, set.methods()...); err != nil {
			return err
		}
		if set.unmatched > 0 && !movesMass(set.method) {
			return usageError{fmt.Sprintf("--unmatched with --method %s; want a method that moves mass, like multiscale or exact", set.method)}
		}
		if set.mass == "amount" && set.method == "kernel" {
			return usageError{"--mass amount with --method kernel; want share: the kernel compares shares"}
		}
	}
	if set.threads < 0 {
		return usageError{fmt.Sprintf("--threads %d; want 1 or more (0: all processors)", set.threads)}
	}
	if set.gap < 0 || set.gap >= 1 || math.IsNaN(set.gap) {
		return usageError{fmt.Sprintf("--gap %v; want 0 or more and below 1, like 0.01", set.gap)}
	}
	if set.timeLimit < 0 {
		return usageError{fmt.Sprintf("--time-limit %v; want 0 or more, like 90s or 5m", set.timeLimit)}
	}
	if has("calibrate") {
		if _, err := set.calibration(); err != nil {
			return err
		}
		if err := set.checkVectors(); err != nil {
			return err
		}
	}
	_, err := set.memoryBytes()
	return err
}

// methods are those of the command.
func (set *settings) methods() []string {
	list := []string{"multiscale", "exact", "kernel", "variation"}
	if set.flags.Lookup("calibrate") != nil { // of a whole matrix
		list = append(list, "flow", "hierarchy")
	}
	if set.flags.Lookup("gap-mean") != nil {
		list = append(list, "certified")
	}
	return list
}

// movesMass reports whether a method is about moving mass along edges.
func movesMass(method string) bool { return method != "kernel" && method != "variation" }

// checkVectors refuses flags of matrix that contradict each other.
func (set *settings) checkVectors() error {
	if err := oneOf("--hold", set.hold, "auto", "memory", "disk"); err != nil {
		return err
	}
	if set.vectors && !slices.Contains([]string{"multiscale", "flow", "hierarchy"}, set.method) {
		return usageError{fmt.Sprintf("--vectors with --method %s; want multiscale, flow or hierarchy, whose distances are those of vectors", set.method)}
	}
	if set.unbiased && set.method != "kernel" {
		return usageError{fmt.Sprintf("--unbiased with --method %s; want kernel", set.method)}
	}
	if set.stored != "" && set.method != "multiscale" {
		return usageError{fmt.Sprintf("--calibration with --method %s; want multiscale, which is calibrated", set.method)}
	}
	if set.stored != "" && set.flags.Changed("calibrate") && set.calibrate != "auto" {
		return usageError{"--calibration FILE beside --calibrate N; want the one or the other"}
	}
	return nil
}

func oneOf(flag, value string, accepted ...string) error {
	if slices.Contains(accepted, value) {
		return nil
	}
	return usageError{fmt.Sprintf("%s %q%s; want one of %s", flag, value, didYouMean(value, accepted), strings.Join(accepted, ", "))}
}

// calibration is the number of pairs, -1 for auto.
func (set *settings) calibration() (int, error) {
	if set.calibrate == "auto" {
		return -1, nil
	}
	n, err := strconv.Atoi(set.calibrate)
	if err != nil || n < 0 {
		return 0, usageError{fmt.Sprintf("--calibrate %q; want a number of pairs, 0 for none, or auto", set.calibrate)}
	}
	return n, nil
}

// memoryBytes reads sizes like 4GiB, 500MB or 2G; 0 is no limit.
func (set *settings) memoryBytes() (uint64, error) {
	text := strings.TrimSpace(strings.ToLower(set.memory))
	digits := strings.TrimRight(text, "abcdefghijklmnopqrstuvwxyz ")
	unit := map[string]float64{
		"": 1, "b": 1, "k": 1 << 10, "m": 1 << 20, "g": 1 << 30, "t": 1 << 40,
		"kib": 1 << 10, "mib": 1 << 20, "gib": 1 << 30, "tib": 1 << 40, "kb": 1e3, "mb": 1e6, "gb": 1e9, "tb": 1e12,
	}[strings.TrimSpace(text[len(digits):])]
	x, err := strconv.ParseFloat(digits, 64)
	if text == "" {
		return 0, nil
	}
	if err != nil || unit == 0 || x < 0 || x*unit > 1<<60 {
		return 0, usageError{fmt.Sprintf("--memory %q; want a size like 4GiB or 500MB (0: no limit)", set.memory)}
	}
	return uint64(x * unit), nil
}

func (set *settings) network() graphio.NetworkOptions {
	return graphio.NetworkOptions{Directed: set.directed, LengthFrom: set.lengthFrom, Bridge: set.bridge}
}

func (set *settings) sampling() graphio.SampleOptions {
	return graphio.SampleOptions{Missing: set.missing, RowNames: set.rows, ColumnNames: set.columns}
}

func (s *session) options(set *settings) (pairwise.Options, error) {
	memory, err := set.memoryBytes()
	if err != nil {
		return pairwise.Options{}, err
	}
	opt := pairwise.Options{
		Shares: set.mass == "share", Unmatched: set.unmatched, Seed: set.seed, Threads: set.threads,
		Memory: memory, Progress: s.progress.report, Phases: &s.phases,
	}
	if set.flags.Lookup("calibrate") != nil {
		if opt.Calibrate, err = set.calibration(); err != nil {
			return opt, err
		}
		opt.KeepVectors, opt.Unbiased = set.vectors, set.unbiased
		if set.hold != "auto" {
			opt.Hold = set.hold
		}
		if set.out != "" {
			opt.Scratch = filepath.Dir(set.out)
		}
	}
	return opt, nil
}
