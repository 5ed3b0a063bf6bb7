package demo

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"

	"example.org/barrow/graphio"
	"example.org/barrow/graphio/shortest"
)

var weekdays = []string{"mon", "tue", "wed", "thu", "fri", "sat", "sun"}

// A purpose is why people drive: what they leave, what they go to, and how many
// of a thousand journeys of a working day, a Saturday and a Sunday begin in
// each hour.
type purpose struct {
	name           string
	from, to       func(quarter) float64
	work, sat, sun [24]float64
}

func homes(q quarter) float64   { return q.homes }
func offices(q quarter) float64 { return q.offices }
func stalls(q quarter) float64  { return q.market }
func docks(q quarter) float64   { return q.harbour }
func sights(q quarter) float64  { return q.leisure }

var purposes = []purpose{
	{"to work", homes, offices,
		[24]float64{0, 0, 0, 1, 4, 16, 60, 190, 170, 60, 25, 18, 16, 18, 14, 10, 8, 6, 4, 3, 2, 1, 0, 0},
		[24]float64{0, 0, 0, 0, 2, 6, 16, 30, 36, 30, 18, 10, 8, 6, 4, 3, 2, 2, 1, 1, 0, 0, 0, 0},
		[24]float64{0, 0, 0, 0, 0, 2, 5, 9, 12, 10, 8, 5, 4, 3, 2, 1, 1, 0, 0, 0, 0, 0, 0, 0}},
	{"from work", offices, homes,
		[24]float64{2, 1, 0, 0, 0, 1, 2, 6, 10, 12, 14, 20, 34, 26, 30, 70, 160, 180, 90, 40, 22, 16, 10, 5},
		[24]float64{3, 1, 0, 0, 0, 0, 1, 2, 4, 6, 10, 18, 30, 28, 24, 20, 20, 22, 14, 8, 6, 5, 4, 3},
		[24]float64{3, 1, 0, 0, 0, 0, 0, 1, 2, 3, 4, 6, 10, 10, 9, 9, 10, 10, 8, 5, 4, 3, 2, 1}},
	{"to market", homes, stalls,
		[24]float64{0, 0, 0, 0, 0, 1, 3, 8, 22, 40, 44, 36, 24, 20, 18, 16, 14, 10, 6, 2, 0, 0, 0, 0},
		[24]float64{0, 0, 0, 0, 1, 2, 8, 30, 80, 130, 140, 110, 70, 44, 30, 20, 12, 8, 4, 2, 0, 0, 0, 0},
		[24]float64{0, 0, 0, 0, 0, 0, 0, 1, 3, 6, 8, 8, 6, 6, 5, 4, 3, 2, 1, 0, 0, 0, 0, 0}},
	{"from market", stalls, homes,
		[24]float64{0, 0, 0, 0, 0, 0, 1, 3, 8, 20, 34, 42, 38, 26, 22, 20, 20, 18, 10, 4, 1, 0, 0, 0},
		[24]float64{0, 0, 0, 0, 0, 0, 2, 8, 26, 60, 110, 140, 120, 84, 50, 34, 24, 16, 8, 4, 1, 0, 0, 0},
		[24]float64{0, 0, 0, 0, 0, 0, 0, 0, 1, 3, 6, 8, 8, 6, 6, 5, 5, 4, 2, 1, 0, 0, 0, 0}},
	{"to the docks", homes, docks, // shifts begin at 6, 14 and 22
		[24]float64{1, 0, 0, 1, 10, 90, 20, 4, 3, 3, 3, 4, 12, 86, 18, 3, 2, 2, 2, 3, 10, 70, 12, 2},
		[24]float64{1, 0, 0, 1, 8, 64, 14, 3, 2, 2, 2, 3, 8, 58, 12, 2, 1, 1, 1, 2, 8, 50, 8, 1},
		[24]float64{1, 0, 0, 0, 4, 30, 8, 1, 1, 1, 1, 1, 4, 28, 6, 1, 1, 1, 1, 1, 4, 30, 5, 1}},
	{"from the docks", docks, homes,
		[24]float64{4, 1, 0, 0, 0, 2, 76, 24, 4, 2, 2, 3, 3, 6, 82, 22, 4, 3, 2, 2, 2, 4, 74, 20},
		[24]float64{4, 1, 0, 0, 0, 1, 54, 16, 3, 2, 2, 2, 2, 4, 58, 14, 3, 2, 1, 1, 1, 3, 52, 14},
		[24]float64{3, 1, 0, 0, 0, 1, 30, 8, 1, 1, 1, 1, 1, 2, 28, 6, 1, 1, 1, 1, 1, 2, 28, 8}},
	{"out and about", homes, sights,
		[24]float64{4, 2, 1, 0, 0, 1, 2, 4, 8, 12, 14, 16, 20, 22, 24, 28, 34, 44, 60, 64, 46, 28, 16, 8},
		[24]float64{10, 6, 3, 1, 0, 1, 2, 5, 12, 24, 36, 48, 58, 70, 76, 74, 66, 62, 70, 76, 66, 46, 32, 20},
		[24]float64{12, 7, 3, 1, 0, 1, 2, 4, 10, 26, 46, 64, 74, 90, 96, 88, 70, 54, 44, 36, 26, 16, 9, 5}},
	{"home again", sights, homes,
		[24]float64{10, 5, 2, 1, 0, 0, 1, 2, 4, 7, 10, 13, 16, 18, 20, 24, 28, 34, 42, 50, 60, 60, 44, 24},
		[24]float64{26, 18, 10, 4, 1, 0, 1, 2, 5, 10, 18, 28, 38, 48, 60, 72, 74, 66, 54, 50, 56, 62, 58, 42},
		[24]float64{24, 16, 8, 3, 1, 0, 1, 2, 4, 9, 18, 32, 46, 60, 78, 92, 96, 82, 60, 48, 40, 30, 18, 9}},
}

// journeys is how many journeys of a purpose begin in an hour, in the unit of
// the tables above. Wednesday is the smaller market day.
func (p purpose) journeys(weekday, hour int) float64 {
	switch {
	case weekday == 5:
		return p.sat[hour]
	case weekday == 6:
		return p.sun[hour]
	case weekday == 2 && (p.name == "to market" || p.name == "from market"):
		return 2 * p.work[hour]
	}
	return p.work[hour]
}

// busy scales journeys to vehicles counted at junctions.
const busy = 2

// count draws the vehicles that pass every junction in every hour: Poisson
// numbers whose means are the loads of all purposes at that hour.
func (t *Town) count(seed uint64, s *streets) {
	open, closed := loads(seed, s, -1), loads(seed, s, t.Closed)
	r := chance(seed, countStream)
	var list []graphio.Sample
	for day := range 14 {
		for hour := range 24 {
			l := Label{Day: day + 1, Weekday: weekdays[day%7], Hour: hour, Week: day/7 + 1, Open: day < 7}
			load := open
			if !l.Open {
				load = closed
			}
			sample := graphio.Sample{Name: fmt.Sprintf("w%d-%s-%02d", l.Week, l.Weekday, hour)}
			for v := range s.names {
				mean := 0.0
				for p := range purposes {
					mean += float64(purposes[p].journeys(day%7, hour) * load[p][v])
				}
				if n := poisson(r, float64(busy*mean)); n > 0 {
					sample.Nodes = append(sample.Nodes, int32(v))
					sample.Values = append(sample.Values, float64(n))
				}
			}
			list = append(list, sample)
			t.Labels = append(t.Labels, l)
		}
	}
	var err error
	if t.Samples, err = graphio.NewSamples(len(s.names), list); err != nil {
		panic(fmt.Sprintf("demo: %v", err)) // names and nodes are in order by construction
	}
}

// poisson draws a Poisson number by counting how many uniform factors it takes
// to fall below exp(-mean) (Knuth 1969, volume 2, 3.4.1).
func poisson(r *rand.Rand, mean float64) int {
	n := 0
	for mean > 20 { // so that exp stays well above 0: sums of Poisson numbers are Poisson
		n += poisson(r, 20)
		mean -= 20
	}
	floor := fall(mean)
	for product := r.Float64(); product > floor; product *= r.Float64() {
		n++
	}
	return n
}

// fall is exp(-x) for 0 <= x <= 20, by a Taylor series for x/256 squared eight
// times: the library's function is assembly that may differ between processors
// in the last digit.
func fall(x float64) float64 {
	x /= 256
	sum, term := 1.0, 1.0
	for k := 1.0; k < 9; k++ {
		term = -term * x / k
		sum += term
	}
	for range 8 {
		sum *= sum
	}
	return sum
}

// perQuarter is how many junctions of a quarter its journeys begin and end at,
// and spread how many sets of street speeds routes are found for: drivers do
// not all take the same street.
const (
	perQuarter = 8
	spread     = 4
)

// loads is, for each purpose, how much of a unit of journeys passes every
// junction. without is the bridge that is closed, -1 for none. The journeys are
// the same either way; only their routes change.
func loads(seed uint64, s *streets, without int) [][]float64 {
	places := places(seed, s)
	near := s.network(nil)
	load := make([][]float64, len(purposes))
	for p := range load {
		load[p] = make([]float64, len(s.names))
	}
	r := chance(seed, routeStream)
	for range spread {
		stretch := make([]float64, len(s.edges))
		for i := range stretch {
			stretch[i] = tenth(10+float64(10*r.Float64())) / 10
			if without >= 0 && s.touches(i, s.bridges[without].Mid) {
				stretch[i] = 1e6
			}
		}
		driven := s.network(stretch)
		for _, to := range places {
			s.assign(near, driven, places, to, load)
		}
	}
	return load
}

func (s *streets) touches(edge, node int) bool {
	return int(s.edges[edge].From) == node || int(s.edges[edge].To) == node
}

// A place is where journeys begin and end.
type place struct{ node, quarter int }

func places(seed uint64, s *streets) []place {
	r := chance(seed, placeStream)
	byQuarter := make([][]int, len(quarters))
	for v := range s.names {
		for q := range quarters {
			if s.district[v] == quarters[q].name && !s.onBridge(v) {
				byQuarter[q] = append(byQuarter[q], v)
			}
		}
	}
	var list []place
	for q, nodes := range byQuarter {
		r.Shuffle(len(nodes), func(i, j int) { nodes[i], nodes[j] = nodes[j], nodes[i] })
		for _, v := range nodes[:perQuarter] {
			list = append(list, place{v, q})
		}
	}
	return list
}

func (s *streets) onBridge(v int) bool {
	return slices.ContainsFunc(s.bridges, func(b Bridge) bool { return b.Mid == v })
}

// assign sends the journeys of all purposes from every place to one, by the
// shortest way on the network driven. How many there are falls with the square
// of the distance on the network near, as in a gravity model of trips (Wilson
// 1967 has its theory).
func (s *streets) assign(near, driven *graphio.Network, places []place, to place, load [][]float64) {
	const reach = 2200.0
	dist := shortest.From(near, to.node, shortest.Either)
	time, via := make([]float64, len(s.names)), make([]int32, len(s.names))
	for v := range time {
		time[v] = math.Inf(1)
	}
	time[to.node] = 0
	shortest.Sweep(driven, time, shortest.Either, via)

	begin := make([][]float64, len(purposes))
	for p := range begin {
		begin[p] = make([]float64, len(s.names))
		for _, from := range places {
			if from.node != to.node {
				far := dist[from.node] / reach
				pull := float64(purposes[p].from(quarters[from.quarter]) * purposes[p].to(quarters[to.quarter]))
				begin[p][from.node] += pull / (1 + float64(far*far)) / (perQuarter * perQuarter * spread * 400)
			}
		}
	}
	// From the farthest junction inwards, each passes its journeys on.
	for _, v := range byTime(time) {
		for p := range begin {
			load[p][v] += begin[p][v]
			if via[v] >= 0 {
				e := s.edges[via[v]]
				begin[p][int(e.From)+int(e.To)-v] += begin[p][v]
			}
		}
	}
}

// byTime lists junctions from the latest to the earliest.
func byTime(time []float64) []int {
	order := make([]int, len(time))
	for v := range order {
		order[v] = v
	}
	slices.SortStableFunc(order, func(u, v int) int {
		switch {
		case time[u] > time[v]:
			return -1
		case time[u] < time[v]:
			return 1
		}
		return 0
	})
	return order
}
