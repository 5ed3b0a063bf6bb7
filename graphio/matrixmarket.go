package graphio

import (
	"bufio"
	"bytes"
	"fmt"
	"math"
	"strconv"
)

// A marketReader reads the Matrix Market exchange format (Boisvert, Pozo &
// Remington 1996, NIST IR 5935): coordinate or array; real, integer or pattern;
// general or symmetric.
type marketReader struct {
	*sampleReader
	path                                    string
	scan                                    *bufio.Scanner
	line                                    int
	pattern, integer, symmetric, coordinate bool
}

// maxLine is the longest line of a Matrix Market file, past the 1024 its
// definition allows.
const maxLine = 1 << 16

func (r *sampleReader) readMatrixMarket(in *input) ([]Sample, error) {
	m := &marketReader{sampleReader: r, path: in.path, scan: bufio.NewScanner(in)}
	m.scan.Buffer(nil, maxLine)
	if err := m.banner(); err != nil {
		return nil, err
	}
	size, err := m.size()
	if err != nil {
		return nil, err
	}
	a, err := r.readAxes(in.path, size[0], size[1])
	if err != nil {
		return nil, err
	}
	if m.coordinate {
		err = m.coordinates(a, size)
	} else {
		err = m.array(a, size)
	}
	if err == nil && m.scan.Err() != nil {
		err = m.readError(in)
	}
	if err == nil {
		err = r.faults.Err()
	}
	if err != nil {
		return nil, err
	}
	list := r.collect(a.samples, func(first, again int) {
		r.faults.Add(Fault{
			File:  in.path,
			Found: fmt.Sprintf("two entries for sample %q at node %q", a.samples[r.sample[again]], r.net.Name(int(r.node[again]))),
			Want:  "one entry for each row and column",
		})
	})
	return list, r.faults.Err()
}

func (m *marketReader) readError(in *input) error {
	if m.scan.Err() == bufio.ErrTooLong {
		return oneFault(m.fault(fmt.Sprintf("a line of more than %d bytes", maxLine), "short lines, as the Matrix Market format has"))
	}
	return in.readFault(m.scan.Err(), m.line+1)
}

func (m *marketReader) fault(found, want string) Fault {
	return Fault{File: m.path, Line: m.line, Found: found, Want: want}
}

// banner reads the first line.
func (m *marketReader) banner() error {
	const want = "%%MatrixMarket matrix, then coordinate or array, then real, integer or pattern, then general or symmetric"
	m.next()
	words := bytes.Fields(m.scan.Bytes())
	if len(words) > 0 {
		words[0] = bytes.TrimPrefix(words[0], []byte("\xef\xbb\xbf")) // byte order mark
	}
	if len(words) != 5 || string(words[0]) != "%%MatrixMarket" || lower(string(words[1])) != "matrix" {
		return oneFault(m.fault("first line "+show(m.scan.Bytes()), want))
	}
	switch lower(string(words[2])) {
	case "coordinate":
		m.coordinate = true
	case "array":
	default:
		return oneFault(m.fault("form "+show(words[2]), want))
	}
	switch lower(string(words[3])) {
	case "real":
	case "integer":
		m.integer = true
	case "pattern":
		m.pattern = true
	default:
		return oneFault(m.fault("values "+show(words[3]), want))
	}
	switch lower(string(words[4])) {
	case "general":
	case "symmetric":
		m.symmetric = true
	default:
		return oneFault(m.fault("symmetry "+show(words[4]), want))
	}
	if m.pattern && !m.coordinate {
		return oneFault(m.fault("an array of a pattern", want))
	}
	return nil
}

// next goes to the next line that is not blank.
func (m *marketReader) next() bool {
	for m.scan.Scan() {
		m.line++
		if len(bytes.TrimSpace(m.scan.Bytes())) > 0 {
			return true
		}
	}
	return false
}

// size reads the line after the comments: rows, columns and, of coordinates,
// entries.
func (m *marketReader) size() ([]int64, error) {
	want := "rows and columns"
	count := 2
	if m.coordinate {
		want, count = "rows, columns and entries", 3
	}
	for m.next() {
		line := m.scan.Bytes()
		if line[0] == '%' {
			continue
		}
		words := bytes.Fields(line)
		size := make([]int64, len(words))
		good := len(words) == count
		for i, w := range words {
			n, err := strconv.ParseInt(string(w), 10, 64)
			if err != nil || n < 0 {
				good = false
			}
			size[i] = n
		}
		if !good {
			return nil, oneFault(m.fault("size line "+show(line), "the numbers of "+want))
		}
		if m.symmetric && size[0] != size[1] {
			return nil, oneFault(m.fault(fmt.Sprintf("a symmetric matrix of %d rows and %d columns", size[0], size[1]), "as many rows as columns"))
		}
		return size, nil
	}
	return nil, oneFault(m.fault("the end of the file", "a line with the numbers of "+want))
}

// coordinates reads lines of row, column and value.
func (m *marketReader) coordinates(a *axes, size []int64) error {
	count := 3
	if m.pattern {
		count = 2
	}
	read := int64(0)
	for ; m.next(); read++ {
		if read == size[2] {
			return oneFault(m.fault("more entries than the size line says", fmt.Sprintf("%d entries", size[2])))
		}
		words := bytes.Fields(m.scan.Bytes())
		if len(words) != count {
			m.faults.Add(m.fault("entry "+show(m.scan.Bytes()), fmt.Sprintf("%d numbers", count)))
			continue
		}
		i, okRow := m.position(words[0], size[0], "row")
		j, okColumn := m.position(words[1], size[1], "column")
		x, okValue := 1.0, true
		if !m.pattern {
			x, okValue = m.value(words[2])
		}
		if okRow && okColumn && okValue {
			m.addAt(a, i, j, x)
			if m.symmetric && i != j {
				m.addAt(a, j, i, x)
			}
		}
	}
	if m.scan.Err() == nil && read < size[2] {
		return oneFault(m.fault(fmt.Sprintf("the end of the file after %d entries", read), fmt.Sprintf("the %d entries that the size line says", size[2])))
	}
	return nil
}

func (m *marketReader) position(word []byte, most int64, what string) (int64, bool) {
	i, err := strconv.ParseInt(string(word), 10, 64)
	if err != nil || i < 1 || i > most {
		m.faults.Add(m.fault(what+" "+show(word), fmt.Sprintf("a %s from 1 to %d", what, most)))
		return 0, false
	}
	return i - 1, true
}

func (m *marketReader) value(word []byte) (float64, bool) {
	x, kind := parseNumber(word)
	v, found, want := m.mass(x, kind)
	if found != "" {
		m.faults.Add(m.fault(found+" "+show(word), want))
		return 0, false
	}
	if m.integer && v != math.Trunc(v) {
		m.faults.Add(m.fault("a value that is not whole: "+show(word), "a whole number; or real, not integer, in the first line"))
		return 0, false
	}
	return v, true
}

// array reads a value a line, column by column; of a symmetric matrix the part
// on and below the diagonal.
func (m *marketReader) array(a *axes, size []int64) error {
	for j := range size[1] {
		first := int64(0)
		if m.symmetric {
			first = j
		}
		for i := first; i < size[0]; i++ {
			if !m.next() {
				if m.scan.Err() != nil {
					return nil
				}
				return oneFault(m.fault("the end of the file", "a value "+a.place(i, j)))
			}
			x, ok := m.value(bytes.TrimSpace(m.scan.Bytes()))
			if !ok || x == 0 {
				continue
			}
			m.addAt(a, i, j, x)
			if m.symmetric && i != j {
				m.addAt(a, j, i, x)
			}
		}
	}
	if m.next() {
		return oneFault(m.fault("more values than the size line says", fmt.Sprintf("%d rows and %d columns", size[0], size[1])))
	}
	return nil
}
