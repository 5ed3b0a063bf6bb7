package graphio_test

import (
	"slices"
	"testing"

	"example.org/barrow/graphio"
)

func TestReadMatrix(t *testing.T) {
	m, source, err := graphio.ReadMatrix(put(t, "m.csv", "sample,a,\"b,c\"\na,0,2.5\n\"b,c\",1,0\n"))
	if err != nil {
		t.Fatal(err)
	}
	if !slices.Equal(m.Names, []string{"a", "b,c"}) || !slices.Equal(m.Value, []float64{0, 2.5, 1, 0}) || source.Rows != 2 {
		t.Errorf("%+v, %+v", m, source)
	}
	for _, c := range []refusal{
		{"not square", "sample,a,b\na,0,1\n", 0, 0, []string{"1 rows"}},
		{"too long", "sample,a\na,0\nb,1\n", 3, 1, []string{"row number 2"}},
		{"other order", "sample,a,b\nb,0,1\na,1,0\n", 2, 1, []string{`row "b"`, `"a", as the header has`}},
		{"negative", "sample,a,b\na,0,-1\nb,1,0\n", 2, 3, []string{`distance "-1"`}},
		{"missing", "sample,a,b\na,0,\nb,1,0\n", 2, 3, []string{"a finite number"}},
		{"diagonal", "sample,a,b\na,0,1\nb,1,3\n", 3, 3, []string{"of a sample from itself"}},
		{"name twice", "sample,a,a\na,0,1\na,1,0\n", 1, 3, []string{`name "a" again`}},
		{"samples", "sample,node,value\nx,a,1\n", 1, 0, []string{"a square matrix"}},
	} {
		path := put(t, "m.csv", c.text)
		_, _, err := graphio.ReadMatrix(path)
		c.check(t, err, path)
	}
}

func FuzzReadMatrix(f *testing.F) {
	for _, seed := range []string{"sample,a,b\na,0,1\nb,1,0\n", "s;\"x\n\"\n\"x\n\";0\n"} {
		f.Add([]byte(seed))
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		m, _, err := graphio.ReadMatrix(fuzzFile(t, "m.csv", data))
		if err != nil {
			mustBeFaults(t, err)
		} else if n := len(m.Names); n == 0 || len(m.Value) != n*n {
			t.Fatalf("%d names and %d values", n, len(m.Value))
		}
	})
}
