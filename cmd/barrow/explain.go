package main

import (
	"bufio"
	"cmp"
	"fmt"
	"io"
	"slices"
	"strings"

	"example.org/barrow/diffusion"
	"example.org/barrow/exact"
	"example.org/barrow/graphio"
)

// An explanation is where the mass of a pair went.
type explanation struct {
	movements []exact.Movement
	transfers []exact.Transfer
	corridors []exact.Corridor
	districts []string // of every node
	stayed    float64
	found     bool // the districts are those of the network, not of the user
}

const outsideName = "(created or removed)"

func explain(net *graphio.Network, r *exact.Result) *explanation {
	e := &explanation{movements: r.Movements(), corridors: r.Corridors(10), stayed: r.Stayed()}
	district := net.Districts()
	if district == nil {
		district = foundDistricts(net)
		e.found = true
	}
	e.districts = district
	e.transfers = exact.Between(e.movements, district, outsideName)
	return e
}

// foundDistricts names every node's aggregate after its best connected node.
func foundDistricts(net *graphio.Network) []string {
	label, middle := diffusion.NewHierarchy(diffusion.NewWalk(net)).Districts()
	around := "around "
	if len(middle) == net.Order() { // every node by itself
		around = ""
	}
	list := make([]string, len(label))
	for v, d := range label {
		list[v] = around + net.Name(int(middle[d]))
	}
	return list
}

func (e *explanation) write(f *folder, net *graphio.Network, s *redrawn) error {
	err := f.write("districts.csv", func(w *bufio.Writer) error {
		r := &row{w: w}
		r.text("from,to,mass,cost")
		if s != nil {
			r.text("cost_low,cost_high")
		}
		if err := r.end(); err != nil {
			return err
		}
		for k, t := range e.transfers {
			names := quoted([]string{t.From, t.To})
			r.text(names[0]).text(names[1]).number(t.Mass).number(t.Cost)
			if s != nil {
				low, high := interval(s.costs[k])
				r.number(low).number(high)
			}
			if err := r.end(); err != nil {
				return err
			}
		}
		return nil
	})
	if err != nil {
		return err
	}
	return f.write("corridors.csv", func(w *bufio.Writer) error {
		r := &row{w: w}
		if err := r.text("corridor,step,node,mass,length").end(); err != nil {
			return err
		}
		for k, c := range e.corridors {
			for step, v := range c.Nodes {
				r.text(fmt.Sprint(k + 1)).text(fmt.Sprint(step + 1)).text(quoted([]string{net.Name(int(v))})[0]).number(c.Mass).number(c.Length)
				if err := r.end(); err != nil {
					return err
				}
			}
		}
		return nil
	})
}

// summary says it in lines.
func (e *explanation) summary(w io.Writer, set *settings, net *graphio.Network) {
	moved, cost := 0.0, 0.0
	for _, m := range e.movements {
		moved += m.Mass
		cost += m.Mass * m.Length
	}
	if moved == 0 {
		return
	}
	amount := human
	if set.mass == "share" {
		amount = percent
	}
	fmt.Fprintf(w, "moved     %s of the mass, %s stays where it is; a moved unit goes %s on average, half of it up to %s, nine tenths up to %s\n",
		amount(moved), amount(e.stayed), human(cost/moved), human(exact.Travelled(e.movements, 0.5)), human(exact.Travelled(e.movements, 0.9)))
	list := slices.Clone(e.transfers)
	slices.SortStableFunc(list, func(a, b exact.Transfer) int { return cmp.Compare(b.Cost, a.Cost) })
	what := "districts"
	if e.found {
		what = "parts of the network, as it has no districts"
	}
	fmt.Fprintf(w, "between   %s, the most costly first; mass, and its part of the distance:\n", what)
	for _, t := range list[:min(5, len(list))] {
		to := "to " + t.To
		if t.From == t.To {
			to = "within itself"
		}
		fmt.Fprintf(w, "          %8s  %7s  %s %s\n", amount(t.Mass), percent(t.Cost/cost), t.From, to)
	}
	c := e.corridors[0]
	fmt.Fprintf(w, "corridor  %s along %s: %s\n", amount(c.Mass), several(len(c.Nodes)-1, "edge"), pathWords(c, net))
}

// pathWords is a path by its ends and some nodes between.
func pathWords(c exact.Corridor, net *graphio.Network) string {
	const most = 5
	step := max(1, (len(c.Nodes)-1+most-2)/(most-1))
	var names []string
	for k := 0; k < len(c.Nodes); k += step {
		names = append(names, net.Name(int(c.Nodes[k])))
	}
	if last := net.Name(int(c.Nodes[len(c.Nodes)-1])); names[len(names)-1] != last {
		names = append(names, last)
	}
	if step > 1 {
		return strings.Join(names, " … ")
	}
	return strings.Join(names, ", ")
}
