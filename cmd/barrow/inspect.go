package main

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"gonum.org/v1/gonum/graph/topo"

	"example.org/barrow/graphio"
)

// inspect describes input files and lists what is wrong with them. Problems are
// its result, so they go to stdout; the exit code is 2 where there are some.
func (s *session) inspect(args []string) error {
	set := newSettings(s.command)
	set.input()
	set.flags.StringVar(&set.groups, "groups", "", "")
	rest, err := set.parse(args)
	if err != nil {
		return err
	}
	if len(rest) > 0 {
		return usageError{fmt.Sprintf("%q, where only flags are taken", rest[0])}
	}
	if err := set.check(); err != nil {
		return err
	}
	if set.groups != "" && set.samples == "" {
		return usageError{"--groups without --samples; want both"}
	}
	return s.look(set)
}

// look reads file after file; one that cannot be read is a problem, and what
// depends on it is left out.
func (s *session) look(set *settings) error {
	var problems, notes []string
	found := 0
	keep := func(err error) error {
		var faults *graphio.Faults
		if errors.As(err, &faults) {
			problems = append(problems, strings.Split(faults.Error(), "\n")...)
			found += faults.Total
			return nil
		}
		return err
	}
	net, source, err := graphio.ReadNetwork(set.edges, set.nodes, set.network())
	if err := keep(err); err != nil {
		return err
	}
	if net != nil {
		notes = append(notes, source.Warnings...)
		s.lookNetwork(net)
	}
	if net != nil && set.samples != "" {
		samples, source, err := graphio.ReadSamples(set.samples, net, set.sampling())
		if err := keep(err); err != nil {
			return err
		}
		if samples != nil {
			notes = append(notes, source.Warnings...)
			s.lookSamples(net, samples)
			_, err := samples.Shares()
			for _, err := range []error{err, graphio.CheckConnected(net, samples)} {
				if err := keep(err); err != nil {
					return err
				}
			}
		}
		if samples != nil && set.groups != "" {
			groups, source, err := graphio.ReadGroups(set.groups, samples)
			if err := keep(err); err != nil {
				return err
			}
			if groups != nil {
				notes = append(notes, source.Warnings...)
				s.lookGroups(groups, samples)
			}
		}
	}
	for _, n := range notes {
		fmt.Fprintf(s.stdout, "note      %s\n", n)
	}
	if net == nil && set.samples != "" {
		fmt.Fprintln(s.stdout, "note      the samples were not looked at: that takes a network without problems")
	}
	if err := s.ctx.Err(); err != nil {
		return err
	}
	if len(problems) == 0 {
		fmt.Fprintln(s.stdout, "problems  none found")
		return nil
	}
	fmt.Fprintf(s.stdout, "problems  %s\n  %s\n", count(found), strings.Join(problems, "\n  "))
	return errReported
}

func (s *session) lookNetwork(net *graphio.Network) {
	fmt.Fprintf(s.stdout, "network   %s\n", networkLine(net))
	if label, parts := net.Components(); parts > 1 {
		size := make([]int, parts)
		for _, c := range label {
			size[c]++
		}
		fmt.Fprintf(s.stdout, "parts     from %s to %s\n", several(slices.Min(size), "node"), several(slices.Max(size), "node"))
	}
	lengths := make([]float64, net.Size())
	total := 0.0
	oneWay := 0
	for i, e := range net.EdgeList() {
		lengths[i] = e.Length
		total += e.Length
		if e.OneWay {
			oneWay++
		}
	}
	fmt.Fprintf(s.stdout, "lengths   %s, all together %s (your unit)\n", spread(lengths), amount(total))
	if oneWay > 0 {
		reach := "every node can reach every other"
		if parts := len(topo.TarjanSCC(net.AsDirected())); parts > 1 {
			reach = fmt.Sprintf("in %s parts that cannot all reach each other both ways, so that some mass may have no way", count(parts))
		}
		fmt.Fprintf(s.stdout, "one-way   %s of %s; %s\n", count(oneWay), several(net.Size(), "edge"), reach)
	}
	degrees := make([]float64, net.Order())
	for v := range degrees {
		degrees[v] = float64(len(net.Arcs(v)))
	}
	loose := 0
	for _, d := range degrees {
		if d == 0 {
			loose++
		}
	}
	fmt.Fprintf(s.stdout, "degrees   %s edges at a node%s\n", spread(degrees), map[bool]string{true: fmt.Sprintf("; %s without any", several(loose, "node"))}[loose > 0])
	var known []string
	if x, _, geographic := net.Places(); x != nil && geographic {
		known = append(known, "longitude and latitude")
	} else if x != nil {
		known = append(known, "x and y")
	}
	if districts := net.Districts(); districts != nil {
		known = append(known, several(different(districts), "district"))
	}
	if len(known) > 0 {
		fmt.Fprintf(s.stdout, "nodes     have %s\n", strings.Join(known, ", and "))
	}
}

// spread is the least, median and greatest of some numbers.
func spread(x []float64) string {
	if len(x) == 0 {
		return "none"
	}
	sorted := slices.Clone(x)
	slices.Sort(sorted)
	return fmt.Sprintf("%s to %s, median %s", amount(sorted[0]), amount(sorted[len(x)-1]), amount(median(sorted)))
}

func (s *session) lookSamples(net *graphio.Network, samples *graphio.Samples) {
	fmt.Fprintf(s.stdout, "samples   %s\n", samplesLine(samples))
	holds := make([]bool, net.Order())
	totals := make([]float64, samples.Len())
	missing := 0
	for i := range totals {
		sample := samples.At(i)
		totals[i] = sample.Total()
		missing += len(sample.Missing)
		for _, v := range sample.Nodes {
			holds[v] = true
		}
	}
	nodes := 0
	for _, h := range holds {
		if h {
			nodes++
		}
	}
	if len(totals) > 0 {
		least, most := slices.Index(totals, slices.Min(totals)), slices.Index(totals, slices.Max(totals))
		fmt.Fprintf(s.stdout, "mass      %s a sample; least in %s, most in %s\n", spread(totals), samples.At(least).Name, samples.At(most).Name)
	}
	fmt.Fprintf(s.stdout, "          on %s of %s nodes in some sample", count(nodes), count(net.Order()))
	if missing > 0 {
		fmt.Fprintf(s.stdout, "; %s missing, taken as no mass", several(missing, "value"))
	}
	fmt.Fprintln(s.stdout)
	if len(totals) > 1 && slices.Max(totals)-slices.Min(totals) <= 1e-9*math.Abs(slices.Max(totals)) {
		fmt.Fprintln(s.stdout, "          all samples have the same total")
	}
}

func (s *session) lookGroups(groups *graphio.Groups, samples *graphio.Samples) {
	var list []string
	for _, column := range groups.Columns() {
		labels, _ := groups.Labels(column, samples.Names())
		list = append(list, fmt.Sprintf("%s (%s)", column, several(different(labels), "label")))
	}
	fmt.Fprintf(s.stdout, "groups    %s\n", strings.Join(list, ", "))
}

// different counts the different labels; none is no label.
func different(labels []string) int {
	seen := map[string]bool{}
	for _, l := range labels {
		if l != "" {
			seen[l] = true
		}
	}
	return len(seen)
}
