package main

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"os"
	"sort"
	"strconv"

	"example.org/barrow/graphio"
)

// An instance is a transport problem in whole numbers, so that every solver
// has the same one and must find the same optimum to the last digit.
type instance struct {
	family, samples string
	nodes           int
	edge            []wholeEdge
	supply          []int64 // by node, in sum 0
}

type wholeEdge struct {
	from, to int32
	length   int64
	oneWay   bool
}

// massPerNode is the total mass of a sample, by node of the network.
const massPerNode = 1000

// newInstance rounds a network and two samples to whole numbers: lengths that
// are decimals of few digits exactly, others to about 1e-6 of the mean; masses
// so that each sample has the same total.
func newInstance(family, samples string, net *graphio.Network, p, q graphio.Sample) instance {
	in := instance{family: family, samples: samples, nodes: net.Order(), supply: make([]int64, net.Order())}
	list := net.EdgeList()
	scale := lengthScale(list)
	in.edge = make([]wholeEdge, len(list))
	for i, e := range list {
		in.edge[i] = wholeEdge{e.From, e.To, max(1, int64(math.Round(e.Length*scale))), e.OneWay}
	}
	total := int64(massPerNode * net.Order())
	for i, m := range apportion(p, total) {
		in.supply[p.Nodes[i]] += m
	}
	for i, m := range apportion(q, total) {
		in.supply[q.Nodes[i]] -= m
	}
	return in
}

func lengthScale(list []graphio.Edge) float64 {
	mean := 0.0
	for _, e := range list {
		mean += e.Length / float64(len(list))
	}
	for scale := 1.0; scale < 1e5; scale *= 10 {
		exact := true
		for _, e := range list {
			if math.Abs(math.Round(e.Length*scale)/scale-e.Length) > 1e-12*e.Length {
				exact = false
				break
			}
		}
		if exact {
			return scale
		}
	}
	return 1e6 / mean
}

// apportion divides total among the nodes of a sample in proportion, by whole
// numbers: rounded down, and the rest to the largest remainders (Hamilton's
// method), the first node first among equals.
func apportion(s graphio.Sample, total int64) []int64 {
	sum := s.Total()
	whole, rest := make([]int64, len(s.Values)), make([]float64, len(s.Values))
	order := make([]int, len(s.Values))
	left := total
	for i, v := range s.Values {
		x := v / sum * float64(total)
		whole[i] = int64(x)
		rest[i] = x - math.Floor(x)
		order[i] = i
		left -= whole[i]
	}
	sort.SliceStable(order, func(a, b int) bool { return rest[order[a]] > rest[order[b]] })
	for k := int64(0); k < left; k++ {
		whole[order[k%int64(len(order))]]++
	}
	return whole
}

// write writes the form that lemon/lemon.cc describes.
func (in instance) write(to io.Writer) error {
	w := bufio.NewWriterSize(to, 1<<20)
	fmt.Fprintln(w, in.nodes, len(in.edge))
	var line []byte
	for _, e := range in.edge {
		line = strconv.AppendInt(line[:0], int64(e.from), 10)
		line = strconv.AppendInt(append(line, ' '), int64(e.to), 10)
		line = strconv.AppendInt(append(line, ' '), e.length, 10)
		if e.oneWay {
			line = append(line, " 1\n"...)
		} else {
			line = append(line, " 0\n"...)
		}
		w.Write(line)
	}
	for _, b := range in.supply {
		w.Write(append(strconv.AppendInt(line[:0], b, 10), '\n'))
	}
	return w.Flush()
}

// readInstance reads that form back as barrow takes it: what a node has too
// much of is in p, what it lacks in q.
func readInstance(path string) (net *graphio.Network, p, q graphio.Sample, err error) {
	file, err := os.Open(path)
	if err != nil {
		return nil, p, q, err
	}
	defer file.Close()
	numbers := bufio.NewScanner(file)
	numbers.Split(bufio.ScanWords)
	next := func() int64 {
		if !numbers.Scan() {
			err = fmt.Errorf("%s: ends too soon", path)
			return 0
		}
		x, bad := strconv.ParseInt(numbers.Text(), 10, 64)
		if bad != nil {
			err = bad
		}
		return x
	}
	nodes, edges := next(), next()
	list := make([]graphio.Edge, edges)
	for i := range list {
		from, to, length, oneWay := next(), next(), next(), next()
		list[i] = graphio.Edge{From: int32(from), To: int32(to), Length: float64(length), Weight: 1 / float64(length), OneWay: oneWay == 1}
	}
	p.Name, q.Name = "p", "q"
	for v := range nodes {
		b := next()
		s := &p
		if b < 0 {
			s = &q
		}
		if b != 0 {
			s.Nodes, s.Values = append(s.Nodes, int32(v)), append(s.Values, math.Abs(float64(b)))
		}
	}
	if err != nil {
		return nil, p, q, err
	}
	names := make([]string, nodes)
	for v := range names {
		names[v] = strconv.Itoa(v)
	}
	net, err = graphio.NewNetwork(names, list)
	return net, p, q, err
}
