package main

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"os"

	"example.org/barrow/dual/pairwise"
	"example.org/barrow/graphio"
)

// data is what the input files hold.
type data struct {
	net      *graphio.Network
	samples  *graphio.Samples
	inputs   []graphio.InputFile
	warnings []string
	model    *pairwise.Model // of --calibration; nil without

	known  []pairwise.Known // pairs that an earlier run bounded
	groups *graphio.Groups

	distances, against, without *pairwise.Matrix // of files
}

// load reads the network and, where given, the samples.
func (s *session) load(set *settings) (*data, error) {
	if err := affordable(set); err != nil {
		return nil, err
	}
	d := &data{}
	err := s.phases.Time("load", func() error {
		if set.edges == "" { // a matrix alone, see barrow test
			return d.readMatrices(set)
		}
		net, source, err := graphio.ReadNetwork(set.edges, set.nodes, set.network())
		if err != nil {
			return err
		}
		d.net = net
		d.add(source)
		if set.samples == "" && set.earlier == nil || s.ctx.Err() != nil {
			return s.ctx.Err()
		}
		if set.samples != "" {
			if d.samples, source, err = graphio.ReadSamples(set.samples, net, set.sampling()); err != nil {
				return err
			}
			d.add(source)
		}
		if set.earlier != nil {
			if err := set.earlier.extend(d, set); err != nil {
				return err
			}
		}
		if set.stored != "" {
			if err := d.readModel(set.stored); err != nil {
				return err
			}
		}
		if err := d.readMatrices(set); err != nil {
			return err
		}
		return s.ctx.Err()
	})
	if err != nil {
		return nil, err
	}
	for _, w := range d.warnings {
		s.note(w)
	}
	return d, nil
}

// readMatrices reads matrices of distances, and then groups, whose samples are
// those of the distances or of the samples file.
func (d *data) readMatrices(set *settings) error {
	for _, m := range []struct {
		path string
		to   **pairwise.Matrix
	}{{set.test.distances, &d.distances}, {set.test.against, &d.against}, {set.test.without, &d.without}} {
		if m.path == "" {
			continue
		}
		table, source, err := graphio.ReadMatrix(m.path)
		if err != nil {
			return err
		}
		d.add(source)
		if *m.to, err = symmetric(m.path, table); err != nil {
			return err
		}
	}
	if set.groups == "" {
		return nil
	}
	samples := d.samples
	if d.distances != nil {
		var err error
		if samples, err = named(d.distances.Names); err != nil {
			return err
		}
	}
	groups, source, err := graphio.ReadGroups(set.groups, samples)
	if err != nil {
		return err
	}
	d.groups = groups
	d.add(source)
	return nil
}

// symmetric is a table as a matrix of distances without direction.
func symmetric(path string, t *graphio.LabelledMatrix) (*pairwise.Matrix, error) {
	n := len(t.Names)
	m := &pairwise.Matrix{Names: t.Names}
	for i := range n {
		for j := i + 1; j < n; j++ {
			if t.Value[i*n+j] != t.Value[j*n+i] {
				return nil, oneFault(path, fmt.Sprintf("%v from %q to %q and %v back", t.Value[i*n+j], t.Names[i], t.Names[j], t.Value[j*n+i]), "the same distance both ways: a matrix of a network without directions")
			}
			m.Value = append(m.Value, t.Value[i*n+j])
		}
	}
	return m, nil
}

// affordable refuses files that are too large to hold before they are read.
// What is read takes two to four times the bytes of a table; compressed files
// show their size only as they are read.
func affordable(set *settings) error {
	limit, err := set.memoryBytes()
	if err != nil || limit == 0 {
		return err
	}
	total := uint64(0)
	for _, path := range []string{set.edges, set.nodes, set.samples} {
		if info, err := os.Stat(path); err == nil && info.Mode().IsRegular() {
			total += uint64(info.Size())
		}
	}
	if 2*total > limit {
		return &pairwise.MemoryError{Limit: limit, Parts: []pairwise.MemoryPart{{Name: "what is in the files", Bytes: 2 * total}}}
	}
	return nil
}

// readModel reads a calibration of an earlier run.
func (d *data) readModel(path string) error {
	text, err := os.ReadFile(path)
	if err == nil {
		d.model, err = pairwise.ReadModel(bytes.NewReader(text))
	}
	if err != nil {
		return oneFault(path, err.Error(), "the calibration.json of a results folder")
	}
	sum := sha256.Sum256(text)
	d.inputs = append(d.inputs, graphio.InputFile{Path: path, SHA256: hex.EncodeToString(sum[:]), Bytes: int64(len(text))})
	return nil
}

func (d *data) add(source *graphio.Source) {
	d.inputs = append(d.inputs, source.Files...)
	d.warnings = append(d.warnings, source.Warnings...)
}

// networkLine is the network in one line.
func networkLine(net *graphio.Network) string {
	_, parts := net.Components()
	joined := "in one part"
	if parts > 1 {
		joined = fmt.Sprintf("in %s parts", count(parts))
	}
	ways := ""
	if net.Directed() {
		ways = ", one-way edges honoured"
	}
	return fmt.Sprintf("%s, %s, %s%s", several(net.Order(), "node"), several(net.Size(), "edge"), joined, ways)
}

// samplesLine is the samples in one line.
func samplesLine(samples *graphio.Samples) string {
	entries, counts := 0, 0
	for i := range samples.Len() {
		s := samples.At(i)
		entries += len(s.Values)
		if s.Counts() {
			counts++
		}
	}
	kind := ""
	switch {
	case counts == samples.Len():
		kind = ", all of them counts"
	case counts > 0:
		kind = fmt.Sprintf(", %s of counts", several(counts, "sample"))
	}
	return fmt.Sprintf("%s, %s above 0%s", several(samples.Len(), "sample"), several(entries, "value"), kind)
}
