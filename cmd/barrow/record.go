package main

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"slices"
	"strings"

	"github.com/spf13/pflag"

	"example.org/barrow/dual"
	"example.org/barrow/dual/pairwise"
	"example.org/barrow/graphio"
)

// A record is what run.json holds: all it takes to repeat a run and to check
// that it came out the same.
type record struct {
	Version    string           `json:"version"`
	Command    string           `json:"command"`
	Arguments  []string         `json:"arguments,omitempty"`
	Parameters map[string]any   `json:"parameters"`
	Seed       uint64           `json:"seed"`
	Inputs     []recordedFile   `json:"inputs"`
	Counts     map[string]int   `json:"counts"`
	Choices    choices          `json:"choices"`
	Warnings   []string         `json:"warnings"`
	Outputs    []recordedFile   `json:"outputs"`
	Phases     []pairwise.Phase `json:"phases"`
}

type recordedFile struct {
	Path   string `json:"path"`
	SHA256 string `json:"sha256"`
	Bytes  int64  `json:"bytes"`
}

// choices are what the run decided by itself.
type choices struct {
	Diffusion   *dual.Description    `json:"diffusion,omitempty"`
	Calibration *recordedCalibration `json:"calibration,omitempty"`
	Vectors     *recordedVectors     `json:"vectors,omitempty"`
}

// recordedVectors says how long the vectors of the samples were, and where they
// were kept.
type recordedVectors struct {
	Width  int    `json:"width"`
	HeldIn string `json:"held_in"` // memory or disk
}

// recordedCalibration is what is known of a calibration, but for its pairs,
// which calibration.csv lists, and what calibration.json has of each edge and
// node.
type recordedCalibration struct {
	*pairwise.Quality
	Terms         []string  `json:"terms,omitempty"`
	Weights       []float64 `json:"weights"`
	Witnesses     int       `json:"witnesses,omitempty"`
	WitnessWeight float64   `json:"witness_weight,omitempty"`
}

// choicesOf is what a run decided by itself.
func choicesOf(r *pairwise.Result) choices {
	c := choices{Diffusion: r.Diffusion}
	switch m := r.Model; {
	case m != nil:
		c.Calibration = &recordedCalibration{m.Quality, m.Terms, m.Weights, len(m.Witnesses), m.WitnessWeight}
	case r.Calibration != nil:
		c.Calibration = &recordedCalibration{Quality: r.Calibration.Quality(), Weights: r.Calibration.Weights}
	}
	if r.Width > 0 {
		c.Vectors = &recordedVectors{r.Width, "memory"}
		if r.OnDisk {
			c.Vectors.HeldIn = "disk"
		}
	}
	return c
}

// newRecord describes a run whose inputs are loaded.
func (s *session) newRecord(set *settings, arguments []string, d *data) *record {
	r := &record{
		Version: version, Command: s.command, Arguments: arguments, Seed: set.seed,
		Parameters: parameters(set.flags), Warnings: append([]string{}, d.warnings...),
		Inputs: []recordedFile{}, Outputs: []recordedFile{},
	}
	for _, in := range d.inputs {
		r.Inputs = append(r.Inputs, recordedFile(in))
	}
	if d.net == nil { // matrices alone
		r.Counts = map[string]int{"samples": len(d.distances.Names)}
		return r
	}
	_, parts := d.net.Components()
	entries := 0
	for i := range d.samples.Len() {
		entries += len(d.samples.At(i).Values)
	}
	r.Counts = map[string]int{
		"nodes": d.net.Order(), "edges": d.net.Size(), "components": parts,
		"samples": d.samples.Len(), "values": entries,
	}
	return r
}

// parameters are the values of all flags that belong in the record.
func parameters(flags *pflag.FlagSet) map[string]any {
	values := map[string]any{}
	flags.VisitAll(func(f *pflag.Flag) {
		if slices.Contains(unrecorded, f.Name) {
			return
		}
		switch text := f.Value.String(); f.Value.Type() {
		case "bool":
			values[f.Name] = text == "true"
		case "int", "uint64", "float64":
			values[f.Name] = json.Number(text)
		case "stringSlice":
			values[f.Name] = text[1 : len(text)-1] // without the brackets, as it is typed
		default:
			values[f.Name] = text
		}
	})
	return values
}

// same reports whether two runs give the same results: the same version,
// command, inputs by content, and parameters but for those that change nothing.
func (r *record) same(other *record) bool {
	return r.Version == other.Version && r.Command == other.Command &&
		slices.Equal(r.Arguments, other.Arguments) && r.sameInputs(other) &&
		bytes.Equal(r.decisive(), other.decisive())
}

func (r *record) sameInputs(other *record) bool {
	return slices.EqualFunc(r.Inputs, other.Inputs, func(a, b recordedFile) bool { return a.SHA256 == b.SHA256 })
}

func (r *record) decisive() []byte {
	values := map[string]any{}
	for name, v := range r.Parameters {
		if !slices.Contains(harmless, name) && !slices.Contains(files, name) {
			values[name] = v
		}
	}
	text, err := json.Marshal(values)
	if err != nil {
		panic(fmt.Sprintf("barrow: %v", err)) // only flag values
	}
	return text
}

func (r *record) encode() ([]byte, error) {
	text, err := json.MarshalIndent(r, "", "  ")
	return append(text, '\n'), err
}

const recordFile = "run.json"

// readRecord reads a run.json.
func readRecord(path string) (*record, error) {
	text, err := os.ReadFile(path)
	if err != nil {
		var failed *fs.PathError
		if errors.As(err, &failed) {
			err = failed.Err
		}
		return nil, oneFault(path, err.Error(), "the run.json of a results folder")
	}
	d := json.NewDecoder(bytes.NewReader(text))
	d.UseNumber()
	r := &record{}
	if err := d.Decode(r); err != nil || r.Command == "" {
		found := "no record of a run"
		if err != nil {
			found += fmt.Sprintf(" (%v)", err)
		}
		return nil, oneFault(path, found, "the run.json of a results folder")
	}
	return r, nil
}

func oneFault(file, found, want string) error {
	return &graphio.Faults{Kept: []graphio.Fault{{File: file, Found: found, Want: want}}, Total: 1}
}

// replayedCommand is the command of the record in "barrow --replay FILE …".
func replayedCommand(args []string) (string, error) {
	path, joined := strings.CutPrefix(args[0], "--replay=")
	if !joined {
		if len(args) < 2 {
			return "", usageError{"--replay without a file; want --replay run.json"}
		}
		path = args[1]
	}
	r, err := readRecord(path)
	if err != nil {
		return "", err
	}
	return r.Command, nil
}

// replay sets all flags as recorded, and returns the record and its arguments.
// Beside --replay only flags that change no result may be given, and those that
// name files, as the files may have moved.
func (s *session) replay(set *settings, rest []string) (*record, error) {
	r, err := readRecord(set.replay)
	if err != nil {
		return nil, err
	}
	if r.Command != s.command {
		return nil, usageError{fmt.Sprintf("%s records a run of barrow %s", set.replay, r.Command)}
	}
	if len(rest) > 0 {
		return nil, usageError{fmt.Sprintf("%q beside --replay; want only the record", rest[0])}
	}
	given := map[string]bool{}
	set.flags.Visit(func(f *pflag.Flag) { given[f.Name] = true })
	for name := range given {
		if !slices.Contains(unrecorded, name) && !slices.Contains(harmless, name) && !slices.Contains(files, name) {
			return nil, usageError{fmt.Sprintf("--%s beside --replay, which takes it from the record; want the one or the other", name)}
		}
	}
	for name, v := range r.Parameters {
		if given[name] {
			continue
		}
		if set.flags.Lookup(name) == nil || slices.Contains(unrecorded, name) || set.flags.Set(name, fmt.Sprint(v)) != nil {
			return nil, oneFault(set.replay, fmt.Sprintf("parameter %s = %v", name, v), "a record of barrow "+version)
		}
	}
	if r.Version != version {
		s.note(fmt.Sprintf("%s was recorded by barrow %s, this is %s", set.replay, r.Version, version))
	}
	return r, nil
}

// sameFiles refuses inputs that differ from those recorded.
func (r *record) sameFiles(inputs []graphio.InputFile) error {
	if len(inputs) != len(r.Inputs) {
		return usageError{fmt.Sprintf("%s where the record has %d; want the same files", several(len(inputs), "input file"), len(r.Inputs))}
	}
	var faults graphio.FaultList
	for i, in := range inputs {
		if was := r.Inputs[i]; in.SHA256 != was.SHA256 {
			faults.Add(graphio.Fault{
				File:  in.Path,
				Found: fmt.Sprintf("SHA-256 %s… (%d bytes)", in.SHA256[:12], in.Bytes),
				Want:  fmt.Sprintf("the file of the recorded run, %.12s… (%d bytes)", was.SHA256, was.Bytes),
			})
		}
	}
	return faults.Err()
}
