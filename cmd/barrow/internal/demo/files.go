package demo

import (
	"bytes"
	"fmt"
	"io"
	"strconv"

	"example.org/barrow/graphio"
)

// A File is an input file of barrow as it would stand on disk.
type File struct {
	Name string
	Data []byte
}

// Files writes the town as ordinary input files: edges.csv (lengths in metres),
// nodes.csv (x east and y north in metres), samples.csv (a row for each junction
// and hour with vehicles) and groups.csv.
func (t *Town) Files() []File {
	groups := t.groups()
	return []File{
		{"edges.csv", written(t.writeEdges)},
		{"nodes.csv", written(func(w io.Writer) error { return graphio.WriteNodes(w, t.Net) })},
		{"samples.csv", written(func(w io.Writer) error { return graphio.WriteSamples(w, t.Net, t.Samples) })},
		{"groups.csv", written(func(w io.Writer) error { return graphio.WriteGroups(w, groups, t.Samples.Names()) })},
	}
}

func written(write func(io.Writer) error) []byte {
	var b bytes.Buffer
	if err := write(&b); err != nil {
		panic(fmt.Sprintf("demo: %v", err)) // a bytes.Buffer does not fail
	}
	return b.Bytes()
}

// writeEdges leaves weights out, which are 1/length as readers take them anyway.
func (t *Town) writeEdges(w io.Writer) error {
	fmt.Fprintln(w, "from,to,length")
	for _, e := range t.Net.EdgeList() {
		length := strconv.FormatFloat(e.Length, 'g', -1, 64)
		if _, err := fmt.Fprintf(w, "%s,%s,%s\n", t.Net.Name(int(e.From)), t.Net.Name(int(e.To)), length); err != nil {
			return err
		}
	}
	return nil
}

func (t *Town) groups() *graphio.Groups {
	rows := make(map[string][]string, len(t.Labels))
	for i, l := range t.Labels {
		bridge := "open"
		if !l.Open {
			bridge = "closed"
		}
		rows[t.Samples.At(i).Name] = []string{strconv.Itoa(l.Day), l.Weekday, strconv.Itoa(l.Hour), strconv.Itoa(l.Week), bridge}
	}
	groups, err := graphio.NewGroups([]string{"day", "weekday", "hour", "week", "bridge"}, rows)
	if err != nil {
		panic(fmt.Sprintf("demo: %v", err)) // rows have as many labels as there are columns
	}
	return groups
}
