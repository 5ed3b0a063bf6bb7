package graphio

import "fmt"

// A LabelledMatrix is a square table of numbers between named things: Value is
// row-major, from the row's name to the column's.
type LabelledMatrix struct {
	Names []string
	Value []float64
}

// ReadMatrix reads a square, labelled matrix: a table whose header names the
// columns after its first field, and whose rows begin with the same names in
// the same order. Numbers are finite and 0 or more, 0 on the diagonal.
// Errors: *Faults. Cost: O(bytes); 8 bytes an entry.
func ReadMatrix(path string) (*LabelledMatrix, *Source, error) {
	var faults FaultList
	t, err := openTable(path, matrixFile, 0, &faults)
	if err != nil {
		return nil, nil, err
	}
	defer t.in.close()
	if len(t.header) < 2 || recognise(t.header, t.columns()) == longFile {
		return nil, nil, t.wrongHeader("")
	}
	m := &LabelledMatrix{Names: t.header[1:]}
	seen := newNameTable(len(m.Names))
	for k, name := range m.Names {
		found, want := nameFault([]byte(name), "sample")
		if v, hash := seen.find([]byte(name)); v >= 0 {
			found, want = fmt.Sprintf("name %q again", name), "each name once"
		} else {
			seen.add([]byte(name), hash)
		}
		if found != "" {
			faults.Add(t.fault(k+1, found, want))
		}
	}
	n := len(m.Names)
	rows := 0
	for ; t.row(); rows++ {
		if !t.sameWidth() {
			continue
		}
		if rows >= n {
			faults.Add(t.fault(0, fmt.Sprintf("row number %d", rows+1), fmt.Sprintf("%d rows, as there are columns after the first", n)))
			break
		}
		if string(t.fields[0]) != m.Names[rows] {
			faults.Add(t.fault(0, fmt.Sprintf("row %s", show(t.fields[0])), fmt.Sprintf("%q, as the header has in that place", m.Names[rows])))
		}
		for k, f := range t.fields[1:] {
			x, kind := parseNumber(f)
			switch {
			case kind != aNumber || !(x >= 0) || !finite(x):
				faults.Add(t.fault(k+1, "distance "+show(f), "a finite number of 0 or more"))
			case k == rows && x != 0:
				faults.Add(t.fault(k+1, "distance "+show(f)+" of a sample from itself", "0"))
			}
			m.Value = append(m.Value, x)
		}
	}
	if err := t.err(); err != nil {
		return nil, nil, err
	}
	if rows < n && faults.total == 0 {
		faults.Add(Fault{File: path, Found: fmt.Sprintf("%d rows", rows), Want: fmt.Sprintf("%d, as there are columns after the first", n)})
	}
	if err := faults.Err(); err != nil {
		return nil, nil, err
	}
	file, err := t.in.finish()
	return m, &Source{Files: []InputFile{file}, Rows: rows}, err
}
