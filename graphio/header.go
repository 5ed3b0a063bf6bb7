package graphio

import (
	"fmt"
	"slices"
	"strings"
)

// What each file is, for messages.
const (
	edgesFile  = "an edges file (from,to,length[,weight][,oneway])"
	nodesFile  = "a nodes file (node[,x,y] or node[,lon,lat], [,district])"
	longFile   = "a samples file (sample,node,value)"
	wideFile   = "a samples file (node, then a column for each sample)"
	matrixFile = "a square matrix with a header of names and the same names down the first column (matrix.csv)"
	groupsFile = "a groups file (sample, then a column for each factor)"
	anySamples = "a samples file (sample,node,value; or node, then a column for each sample; or Matrix Market or NumPy)"
)

// columns finds columns by name, capitals aside; where a name stands twice it
// is the first.
type columns map[string]int

func (t *table) columns() columns {
	c := make(columns, len(t.header))
	for i, h := range t.header {
		if _, twice := c[lower(h)]; !twice {
			c[lower(h)] = i
		}
	}
	return c
}

func (c columns) has(names ...string) bool {
	for _, n := range names {
		if _, ok := c[n]; !ok {
			return false
		}
	}
	return true
}

// at is the column's number, -1 where there is none.
func (c columns) at(name string) int {
	if i, ok := c[name]; ok {
		return i
	}
	return -1
}

// once refuses a second column of the name of one that is read: which of them
// is meant would be a guess.
func (t *table) once(c columns, read ...int) error {
	for i, h := range t.header {
		if at := c.at(lower(h)); at != i && slices.Contains(read, at) {
			return oneFault(t.fault(i, fmt.Sprintf("a second column %q", h), "each column once"))
		}
	}
	return nil
}

// placeNames are the columns of a nodes file besides node.
var placeNames = []string{"x", "y", "lon", "lat", "district"}

// recognise says what a header looks like, "" if like nothing known.
func recognise(header []string, c columns) string {
	places := 0
	for _, h := range header {
		if slices.Contains(placeNames, lower(h)) {
			places++
		}
	}
	switch {
	case c.has("from", "to", "flow"):
		return "a table of flows (from,to,flow,cost)"
	case c.has("from", "to"):
		return edgesFile
	case c.has("sample", "node", "value"):
		return longFile
	case c.has("a", "b", "distance"):
		return "a table of distances (a,b,distance,…)"
	case c.has("node", "potential"):
		return "a table of potentials (node,potential)"
	case c.has("node") && places == len(header)-1:
		return nodesFile
	case lower(header[0]) == "node":
		return wideFile
	case c.has("sample"):
		return groupsFile
	}
	return ""
}

// wrongHeader explains a header that lacks what a reader needs.
func (t *table) wrongHeader(lacks string) error {
	f := Fault{File: t.in.path, Line: t.line, Want: t.what}
	if lacks != "" {
		f.Want = lacks + ", as in " + t.what
	}
	kind := recognise(t.header, t.columns())
	switch other := otherDelimiter(t.header); {
	case other != "":
		f.Found = fmt.Sprintf("one column %s, separated by %s", show([]byte(t.header[0])), other)
		f.Want = "columns separated by commas, tabs or semicolons: " + t.what
	case kind != "" && kind != t.what && !strings.HasPrefix(t.what, kind[:len(kind)-1]):
		f.Found = fmt.Sprintf("columns %s: this looks like %s", t.headerList(), kind)
	case t.looksLikeData():
		f.Found = fmt.Sprintf("no header: the first row is %s", t.headerList())
		f.Want = "a first row that names the columns, " + t.what
	default:
		f.Found = "columns " + t.headerList()
	}
	return oneFault(f)
}

// headerList is the header for a message, cut short where it is long.
func (t *table) headerList() string {
	const most = 6
	list := make([]string, 0, most)
	for i, h := range t.header {
		if i == most {
			return strings.Join(list, ",") + fmt.Sprintf(",… (%d in all)", len(t.header))
		}
		if len(h) > 40 {
			h = h[:40] + "…"
		}
		list = append(list, strings.ToValidUTF8(h, "…"))
	}
	return strings.Join(list, ",")
}

// otherDelimiter names what seems to separate the columns of a header that was
// not split, "" if nothing does.
func otherDelimiter(header []string) string {
	if len(header) != 1 {
		return ""
	}
	h := lower(header[0])
	for _, d := range []struct{ char, name string }{{"|", "bars (|)"}, {":", "colons"}, {" ", "spaces"}} {
		parts := strings.FieldsFunc(h, func(r rune) bool { return string(r) == d.char })
		if len(parts) > 1 && slices.ContainsFunc(parts, isColumnName) {
			return d.name
		}
	}
	return ""
}

func isColumnName(s string) bool {
	switch strings.TrimSpace(s) {
	case "from", "to", "length", "weight", "node", "sample", "value":
		return true
	}
	return false
}

// looksLikeData reports whether the header is more likely a row: it has a
// number, or nothing but an empty field.
func (t *table) looksLikeData() bool {
	for _, h := range t.header {
		if _, kind := parseNumber([]byte(h)); kind == aNumber || h == "" {
			return true
		}
	}
	return false
}

// sameWidth checks that a row has a field for each column of the header.
func (t *table) sameWidth() bool {
	n, want := len(t.fields), len(t.header)
	if n == want {
		return true
	}
	found := fmt.Sprintf("%d fields", n)
	if n == 1 {
		found = "one field " + show(t.fields[0])
	}
	f := t.fault(min(n, want)-1, found, fmt.Sprintf("%d, as in the header, separated by %s", want, delimiterName(t.delim)))
	if n < want {
		f.Column = 0
	}
	t.faults.Add(f)
	return false
}

func delimiterName(d byte) string {
	switch d {
	case '\t':
		return "tabs"
	case ';':
		return "semicolons"
	}
	return "commas"
}

// lineIndex remembers on which line each row stood, in little memory: only
// where the next row is not on the next line.
type lineIndex struct {
	row, line []int
	rows      int
}

// add notes the line of the next row.
func (x *lineIndex) add(line int) {
	if k := len(x.row) - 1; k < 0 || line != x.line[k]+x.rows-x.row[k] {
		x.row = append(x.row, x.rows)
		x.line = append(x.line, line)
	}
	x.rows++
}

// at is the line of a row.
func (x *lineIndex) at(row int) int {
	k, found := slices.BinarySearch(x.row, row)
	if !found {
		k--
	}
	return x.line[k] + row - x.row[k]
}
