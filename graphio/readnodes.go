package graphio

import "fmt"

// readNodes takes names, coordinates and districts from a nodes file.
func (r *edgeReader) readNodes(t *table) error {
	c := t.columns()
	if !c.has("node") || c.has("sample", "value") || c.has("from", "to") || c.has("potential") {
		return t.wrongHeader("")
	}
	node, district := c.at("node"), c.at("district")
	x, y, geographic := c.at("x"), c.at("y"), false
	if c.has("lon") || c.has("lat") {
		x, y, geographic = c.at("lon"), c.at("lat"), true
	}
	if (x < 0) != (y < 0) {
		want := "x and y, or neither"
		if geographic {
			want = "lon and lat, or neither"
		}
		return oneFault(Fault{File: t.in.path, Line: t.line, Found: "columns " + t.headerList(), Want: want})
	}
	if err := t.once(c, node, x, y, district); err != nil {
		return err
	}
	n := t.expectedRows()
	r.names = newNameTable(n)
	r.known = t.in.path
	r.spell.names = func() []string { return r.names.names }
	var lines lineIndex
	var xs, ys []float64
	var districts []string
	labels := newNameTable(0)
	for t.row() {
		if !t.sameWidth() || !r.newNode(t, node, &lines) {
			continue
		}
		lines.add(t.line)
		if x >= 0 {
			px, okX := t.coordinate(x, geographic, 180)
			py, okY := t.coordinate(y, geographic, 90)
			if okX && okY {
				xs, ys = append(xs, px), append(ys, py)
			}
		}
		if district >= 0 {
			districts = append(districts, labels.intern(t.fields[district]))
		}
	}
	if err := t.err(); err != nil {
		return err
	}
	if len(r.names.names) == 0 && r.faults.total == 0 {
		r.faults.Add(Fault{File: t.in.path, Found: "a header and no nodes", Want: "a row for each node"})
	}
	if r.faults.total > 0 {
		// Unknown nodes among the edges would only echo these faults.
		return r.faults.Err()
	}
	r.net.district = districts
	if x >= 0 {
		r.net.x, r.net.y, r.net.geographic = xs, ys, geographic
	}
	file, err := t.in.finish()
	r.source.Files = append(r.source.Files, file)
	return err
}

// newNode adds the node of a row; false where its name has a fault.
func (r *edgeReader) newNode(t *table, column int, lines *lineIndex) bool {
	name := t.fields[column]
	if found, want := nameFault(name, "node"); found != "" {
		t.faults.Add(t.fault(column, found, want))
		return false
	}
	v, hash := r.names.find(name)
	if v >= 0 {
		t.faults.Add(t.fault(column, fmt.Sprintf("node %s again, as on line %d", show(name), lines.at(int(v))), "each node once"))
		return false
	}
	r.names.add(name, hash)
	return true
}

// coordinate reads a finite number, within ±most degrees where geographic.
func (t *table) coordinate(column int, geographic bool, most float64) (float64, bool) {
	v, kind := parseNumber(t.fields[column])
	if kind == aNumber && finite(v) && (!geographic || v >= -most && v <= most) {
		return v, true
	}
	want := "a finite number"
	if geographic {
		want = fmt.Sprintf("degrees between -%v and %v", most, most)
	}
	found := t.header[column] + " " + show(t.fields[column])
	switch {
	case len(t.fields[column]) == 0:
		found = "no " + t.header[column]
		want += ", or no coordinates at all"
	case kind == noNumber:
		want = numberHint(t.fields[column], want)
	}
	t.faults.Add(t.fault(column, found, want))
	return 0, false
}

func finite(x float64) bool { return x-x == 0 }

// expectedRows guesses the number of rows from the size of the file and the
// rows in the buffer; 0 where the size is not known.
func (t *table) expectedRows() int {
	head := t.buf[t.pos:t.end]
	if t.in.size <= 0 || len(head) == 0 {
		return 0
	}
	rows := 1
	for _, c := range head {
		if c == '\n' {
			rows++
		}
	}
	const shortest = 6 // bytes of a row; a file of blank lines gets no more memory than that
	perByte := min(float64(rows)/float64(len(head)), 1.0/shortest)
	return int(perByte * float64(t.in.size) * 1.02)
}
