package demo

import (
	"fmt"
	"math"
	"strings"
)

// SameHours is the comparison shown: the hour from eight on an ordinary working
// day, with the bridge open and with it closed.
func (t *Town) SameHours() (before, after int) { return t.find(4, 8), t.find(11, 8) }

// find is the sample of a day and hour.
func (t *Town) find(day, hour int) int { return (day-1)*24 + hour }

// Read says in plain words what a matrix of distances between all samples and
// the distance of the pair of SameHours show.
func (t *Town) Read(distance func(i, j int) float64, shown float64) string {
	return "What this says\n" + wrap("- ", t.readHours(distance)) + wrap("- ", t.readBridge(distance, shown)) +
		fmt.Sprintf("- Vehicles counted on each bridge, and of all counts the share within %d m of it:\n", nearby) + t.tableOfBridges() + "\n" +
		wrap("", "The town, its names and its counts are invented. On a real network such numbers are no operating instruction: those who run it, local rules and licensed practitioners decide.")
}

// wrap breaks text into lines of 88 letters, indented as far as the mark before
// the first.
func wrap(mark, text string) string {
	var b strings.Builder
	line := mark
	for _, word := range strings.Fields(text) {
		if len(line)+len(word) > 88 {
			b.WriteString(strings.TrimRight(line, " ") + "\n")
			line = strings.Repeat(" ", len(mark))
		}
		line += word + " "
	}
	b.WriteString(strings.TrimRight(line, " ") + "\n")
	return b.String()
}

// The day as it is read: before six and after ten few vehicles are about, and
// distances are mostly chance.
const dawn, dusk = 6, 22

// workdays are the working days of a week but for Wednesday, which has a market.
var workdays = []int{1, 2, 4, 5}

// readHours says which hours of an ordinary working day are most alike.
func (t *Town) readHours(distance func(i, j int) float64) string {
	type hours struct{ g, h int }
	near, far := hours{}, hours{}
	least, most := math.Inf(1), math.Inf(-1)
	for g := dawn; g < dusk; g++ {
		for h := g + 1; h < dusk; h++ {
			d := t.apart(distance, g, h)
			if d < least {
				least, near = d, hours{g, h}
			}
			if d > most {
				most, far = d, hours{g, h}
			}
		}
	}
	chance := max(t.apart(distance, near.g, near.g), t.apart(distance, near.h, near.h))
	verdict := "so the two differ by more than chance."
	if least < 1.2*chance {
		verdict = "so chance explains most of what they differ by."
	}
	return fmt.Sprintf("On ordinary working days the hours from %d:00 and from %d:00 are most alike, %.0f m apart on average. The same hour of two such days is up to %.0f m apart, %s Least alike are the hours from %d:00 and from %d:00, %.0f m.",
		near.g, near.h, least, chance, verdict, far.g, far.h, most)
}

// apart is the mean distance between two hours on different working days of the
// first week.
func (t *Town) apart(distance func(i, j int) float64, g, h int) float64 {
	sum, n := 0.0, 0
	for _, d := range workdays {
		for _, e := range workdays {
			if d != e {
				sum += distance(t.find(d, g), t.find(e, h))
				n++
			}
		}
	}
	return sum / float64(n)
}

// readBridge says what closing the bridge did.
func (t *Town) readBridge(distance func(i, j int) float64, shown float64) string {
	across, within := 0.0, 0.0
	for h := dawn; h < dusk; h++ {
		within += t.apart(distance, h, h) / (dusk - dawn)
		for _, d := range workdays {
			across += distance(t.find(d, h), t.find(d+7, h)) / float64((dusk-dawn)*len(workdays))
		}
	}
	verdict := "no more than chance makes of it."
	if across > 1.2*within {
		verdict = fmt.Sprintf("%.1f times what chance makes of it.", across/within)
	}
	before, after := t.SameHours()
	return fmt.Sprintf("%s closed between the weeks. The same hour of the same working day is %.0f m apart across them, and %.0f m apart on two days of one week: %s %s and %s, solved exactly, are %.0f m apart.",
		t.Bridges[t.Closed].Name, across, within, verdict, t.Samples.At(before).Name, t.Samples.At(after).Name, shown)
}

// tableOfBridges says where the traffic went.
func (t *Town) tableOfBridges() string {
	var b strings.Builder
	fmt.Fprintf(&b, "  %-14s %10s %8s %15s %8s\n", "", "week 1", "week 2", "share: week 1", "week 2")
	for i := range t.Bridges {
		one, two := t.crossed(i, 0), t.crossed(i, 7)
		fmt.Fprintf(&b, "  %-14s %10.0f %8.0f %13.1f %% %6.1f %%\n",
			t.Bridges[i].Name, one.bridge, two.bridge, 100*one.around/one.all, 100*two.around/two.all)
	}
	return b.String()
}

// nearby is how far around a bridge counts are added up, in metres.
const nearby = 500

type crossing struct{ bridge, around, all float64 }

// crossed adds up a week of counts, from the day after first on.
func (t *Town) crossed(bridge, first int) (c crossing) {
	x, y, _ := t.Net.Places()
	mid := t.Bridges[bridge].Mid
	for i := first * 24; i < (first+7)*24; i++ {
		s := t.Samples.At(i)
		for k, v := range s.Nodes {
			c.all += s.Values[k]
			if int(v) == mid {
				c.bridge += s.Values[k]
			}
			if apart(x[v], y[v], x[mid], y[mid]) <= nearby {
				c.around += s.Values[k]
			}
		}
	}
	return c
}
