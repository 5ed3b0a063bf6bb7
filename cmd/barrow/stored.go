package main

import (
	"encoding/csv"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strconv"

	"example.org/barrow/dual/pairwise"
	"example.org/barrow/graphio"
)

// A stored run is a results folder that is built upon: its samples and what is
// proved of their pairs.
type stored struct {
	dir string
	rec *record
}

// same are the flags in which a run must agree with the one it builds upon.
var sameFlags = []string{"directed", "length-from", "bridge", "missing", "mass", "unmatched", "method"}

// buildOn reads the record of a results folder and takes over from it whatever
// is not given: the network files, and how samples are compared.
func buildOn(set *settings, dir string) (*stored, error) {
	rec, err := readRecord(filepath.Join(dir, recordFile))
	if err != nil {
		return nil, err
	}
	if rec.Command != "matrix" {
		return nil, usageError{fmt.Sprintf("%s holds results of barrow %s; want those of barrow matrix", dir, rec.Command)}
	}
	if !rec.intact(dir) {
		return nil, usageError{fmt.Sprintf("%s is not as barrow matrix left it; want its results unchanged", dir)}
	}
	for _, name := range append([]string{"edges", "nodes"}, sameFlags...) {
		flag, value := set.flags.Lookup(name), fmt.Sprint(rec.Parameters[name])
		switch {
		case flag == nil || rec.Parameters[name] == nil:
		case !flag.Changed:
			if err := flag.Value.Set(value); err != nil {
				return nil, oneFault(filepath.Join(dir, recordFile), fmt.Sprintf("parameter %s = %s", name, value), "a record of barrow "+version)
			}
		case slices.Contains(sameFlags, name) && flag.Value.String() != value:
			return nil, usageError{fmt.Sprintf("--%s %s, where %s has %s; want the same, or leave it out", name, flag.Value, dir, value)}
		}
	}
	return &stored{dir, rec}, nil
}

// extend puts the samples of the stored run before those that are loaded, reads
// its calibration, and what it proved of pairs.
func (o *stored) extend(d *data, set *settings) error {
	read := &data{net: d.net}
	list, err := o.rec.samples(read)
	if err != nil {
		return err
	}
	for _, in := range append(slices.Clone(d.inputs), read.inputs...) {
		if in.Path == set.samples {
			continue // the new ones
		}
		if !slices.ContainsFunc(o.rec.Inputs, func(was recordedFile) bool { return was.SHA256 == in.SHA256 }) {
			return oneFault(in.Path, "another file than "+o.dir+" was made of", "the same network and samples, unchanged")
		}
	}
	d.inputs = append(d.inputs, read.inputs...)
	samples, err := graphio.NewSamples(d.net.Order(), list)
	if err != nil {
		return err
	}
	if d.samples != nil {
		for i := range d.samples.Len() {
			s := d.samples.At(i)
			if _, twice := samples.Index(s.Name); twice {
				return oneFault(set.samples, fmt.Sprintf("sample %q, which %s has already", s.Name, o.dir), "new samples only")
			}
			list = append(list, s)
		}
	}
	if d.samples, err = graphio.NewSamples(d.net.Order(), list); err != nil {
		return err
	}
	if o.rec.Parameters["method"] == "multiscale" && d.model == nil {
		if err := d.readModel(filepath.Join(o.dir, "calibration.json")); err != nil {
			return err
		}
	}
	d.known, err = readKnown(filepath.Join(o.dir, "pairs.csv"), d.samples)
	return err
}

// samples reads the samples of a run again: those of the run it was built upon,
// if it was, and then its own.
func (r *record) samples(d *data) ([]graphio.Sample, error) {
	text := func(name string) string { s, _ := r.Parameters[name].(string); return s }
	var list []graphio.Sample
	if dir := text("add"); dir != "" {
		before, err := readRecord(filepath.Join(dir, recordFile))
		if err != nil {
			return nil, err
		}
		if list, err = before.samples(d); err != nil {
			return nil, err
		}
	}
	if text("samples") == "" {
		return list, nil
	}
	samples, source, err := graphio.ReadSamples(text("samples"), d.net, graphio.SampleOptions{Missing: text("missing"), RowNames: text("rows"), ColumnNames: text("columns")})
	if err != nil {
		return nil, err
	}
	d.add(source)
	for i := range samples.Len() {
		list = append(list, samples.At(i))
	}
	return list, nil
}

// readKnown reads the bounds of a pairs.csv; pairs without are left out.
func readKnown(path string, samples *graphio.Samples) ([]pairwise.Known, error) {
	file, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer file.Close()
	rows, err := csv.NewReader(file).ReadAll()
	if err != nil {
		return nil, oneFault(path, err.Error(), "the pairs.csv that barrow matrix wrote")
	}
	var list []pairwise.Known
	for _, row := range rows[1:] {
		if len(row) < 5 || row[3] == "" || row[4] == "" {
			continue
		}
		i, okI := samples.Index(row[0])
		j, okJ := samples.Index(row[1])
		lower, errLower := strconv.ParseFloat(row[3], 64)
		upper, errUpper := strconv.ParseFloat(row[4], 64)
		if !okI || !okJ || errLower != nil || errUpper != nil {
			return nil, oneFault(path, fmt.Sprintf("row %q", row), "the pairs.csv that barrow matrix wrote")
		}
		list = append(list, pairwise.Known{I: i, J: j, Lower: lower, Upper: upper})
	}
	return list, nil
}
