package main

import (
	"bufio"
	"encoding/binary"
	"encoding/json"
	"fmt"
	"math"
	"strings"

	"example.org/barrow/dual/pairwise"
)

// vectorKey is vectors.json: what vectors.npy holds.
type vectorKey struct {
	Samples  []string `json:"samples"` // one a row
	Columns  int      `json:"columns"`
	Type     string   `json:"type"`
	Distance string   `json:"distance"`
	Method   string   `json:"method"`
	Unit     string   `json:"unit"`
}

// writeVectors writes vectors.npy, a row of float32 for each sample, and its
// key.
func (f *folder) writeVectors(d *data, set *settings, r *pairwise.Result) error {
	v := r.Vectors
	err := f.write("vectors.npy", func(w *bufio.Writer) error {
		if _, err := w.WriteString(npyHeader(v.Rows, v.Width)); err != nil {
			return err
		}
		var row []float32
		var text []byte
		for i := range v.Rows {
			var err error
			if row, err = v.Row(i, row); err != nil {
				return err
			}
			text = text[:0]
			for _, x := range row {
				text = binary.LittleEndian.AppendUint32(text, math.Float32bits(x))
			}
			if _, err := w.Write(text); err != nil {
				return err
			}
		}
		return nil
	})
	if err != nil {
		return err
	}
	return f.write("vectors.json", func(w *bufio.Writer) error {
		e := json.NewEncoder(w)
		e.SetIndent("", "  ")
		return e.Encode(vectorKey{
			Samples: r.Matrix.Names, Columns: v.Width, Type: "float32, little-endian",
			Distance: "the L1 distance of two rows, the sum of the differences without sign, is the estimate for the two samples",
			Method:   set.method, Unit: unitLine(set, r),
		})
	})
}

// npyHeader is the head of a NumPy file, version 1.0, of float32 in rows.
func npyHeader(rows, columns int) string {
	text := fmt.Sprintf("{'descr': '<f4', 'fortran_order': False, 'shape': (%d, %d), }", rows, columns)
	pad := 63 - (10+len(text))%64
	text += strings.Repeat(" ", pad) + "\n"
	return "\x93NUMPY\x01\x00" + string(binary.LittleEndian.AppendUint16(nil, uint16(len(text)))) + text
}
