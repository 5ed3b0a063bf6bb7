package inference_test

import (
	"math"
	"slices"
	"testing"

	"example.org/barrow/dual/inference"
	"example.org/barrow/dual/pairwise"
)

var handMatrix = square([]float64{0, 1, 1, 4}, []float64{1, 0, 3, 2}, []float64{1, 3, 0, 3}, []float64{4, 2, 3, 0})

// Four samples by hand with the formula of Anderson 2001: total 10, within 5,
// F 2; the other splits give 6 and −0.4, so 4 of 6 arrangements reach 2.
func TestPseudoFByHand(t *testing.T) {
	factor := labels(2, 2)
	table, err := inference.Model(ctx, handMatrix, inference.Design{Variables: []inference.Variable{factor}, Terms: []string{"group"}}, inference.Scheme{}, lenient(99))
	if err != nil {
		t.Fatal(err)
	}
	f := table.Terms[0]
	near(t, "total", table.Total, 10, 1e-12)
	near(t, "within", table.Residual, 5, 1e-12)
	near(t, "F", f.Statistic, 2, 1e-12)
	near(t, "share", f.Share, 0.5, 1e-12)
	if !f.Exact || f.Reached != 4 || f.Permutations != 6 {
		t.Errorf("%+v, want 4 of 6", f.Outcome)
	}
	for arrangement, want := range map[string]float64{"ABAB": 6, "ABBA": -.4} {
		v := inference.Variable{Name: "group"}
		for _, r := range arrangement {
			v.Labels = append(v.Labels, string(r))
		}
		f, err := inference.PseudoF(ctx, handMatrix, v, inference.Scheme{}, lenient(99))
		if err != nil {
			t.Fatal(err)
		}
		near(t, arrangement, f.Statistic, want, 1e-12)
	}
	r, err := inference.ANOSIM(ctx, handMatrix, factor, inference.Scheme{}, lenient(99))
	if err != nil {
		t.Fatal(err)
	}
	near(t, "ANOSIM R", r.Statistic, .25, 1e-12)
}

// Dune meadows, Bray–Curtis, four kinds of management. Computed with vegan
// 2.6-4 (adonis2, anosim).
func TestDune(t *testing.T) {
	path, ok := outside(t, "dune_bray.csv")
	if !ok {
		return
	}
	d, groups := table(t, path, true)
	factor := inference.Variable{Name: "management", Labels: groups}
	design := inference.Design{Variables: []inference.Variable{factor}, Terms: []string{"management"}}
	a, err := inference.Model(ctx, d, design, inference.Scheme{}, inference.Options{Permutations: 9999, Seed: 1})
	if err != nil {
		t.Fatal(err)
	}
	f := a.Terms[0]
	near(t, "squares", f.Squares, 1.468591751793, 1e-11)
	near(t, "residual", a.Residual, 2.830430118652, 1e-11)
	near(t, "F", f.Statistic, 2.7672434981811, 1e-11)
	near(t, "share", f.Share, .3416106723925, 1e-11)
	if math.Abs(f.P-.003) > .0025 { // its P is about .003; 4.5 standard errors
		t.Errorf("P %v ± %v, want about .003", f.P, f.Error)
	}
	r, err := inference.ANOSIM(ctx, d, factor, inference.Scheme{}, inference.Options{})
	if err != nil {
		t.Fatal(err)
	}
	near(t, "ANOSIM R", r.Statistic, .257870590096504, 1e-12)
}

// Lichen pastures, grazed and not. Computed with vegan 2.6-4 (betadisper) for
// the centroid, and for the median, which vegan finds to a few digits only (its
// reference page has 4.6156), with benchmarks/reference/spatial_median.py.
func TestLichens(t *testing.T) {
	path, ok := outside(t, "varespec_bray.csv")
	if !ok {
		return
	}
	d, groups := table(t, path, true)
	factor := inference.Variable{Name: "grazing", Labels: groups}
	spread, f, err := inference.Spreads(d, factor)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "grazed", spread[0].Within, .394371853991339, 1e-12)
	near(t, "ungrazed", spread[1].Within, .280952582954627, 1e-12)
	near(t, "F", f, 5.81074685383275, 1e-12)
	r, err := inference.Dispersion(ctx, d, factor, inference.Scheme{}, inference.Options{Seed: 1})
	if err != nil {
		t.Fatal(err)
	}
	near(t, "grazed", r.Groups[0].Within, .392587893575434, 1e-8)
	near(t, "ungrazed", r.Groups[1].Within, .270645591286011, 1e-8)
	near(t, "F", r.Statistic, 4.615679325071783, 1e-8)
	if r.P < .01 || r.P > .1 { // the F distribution gives .043
		t.Errorf("P %v", r.P)
	}
	path, ok = outside(t, "varechem_euclid.csv")
	if !ok {
		return
	}
	chemistry, _ := table(t, path, false)
	for how, want := range map[inference.Correlation]float64{
		inference.Pearson: .304745412697958, inference.Spearman: .283791041794495, inference.Kendall: .189196310935441,
	} {
		m, err := inference.Mantel(ctx, d, chemistry, how, inference.Scheme{}, inference.Options{Seed: 1})
		if err != nil {
			t.Fatal(err)
		}
		near(t, "Mantel", m.Statistic, want, 1e-12)
		if m.P > .01 || m.Caution == "" { // vegan's reference page: .002
			t.Errorf("P %v, caution %q", m.P, m.Caution)
		}
	}
}

// Computed with numpy by enumeration; vegan agrees.
func TestMantelByEnumeration(t *testing.T) {
	other := square([]float64{0, 2, 1, 5}, []float64{2, 0, 2, 3}, []float64{1, 2, 0, 4}, []float64{5, 3, 4, 0})
	m, err := inference.Mantel(ctx, handMatrix, other, inference.Pearson, inference.Scheme{}, inference.Options{})
	if err != nil {
		t.Fatal(err)
	}
	near(t, "r", m.Statistic, .8227533512074422, 1e-12)
	if !m.Exact || m.P != 1./24 {
		t.Errorf("%+v, want exactly 1/24", m.Outcome)
	}
}

// Road distances of European cities; computed with R's cmdscale.
func TestCoordinates(t *testing.T) {
	d, _ := table(t, inside("eurodist.csv"), false)
	m, err := inference.Coordinates(d, 2)
	if err != nil {
		t.Fatal(err)
	}
	for k, want := range []float64{19538377.0895, 11856555.3340, 1528844.4680, 1118741.9505} {
		near(t, "eigenvalue", m.Eigenvalues[k], want, 1e-10)
	}
	near(t, "least eigenvalue", slices.Min(m.Eigenvalues), -2251844.33174, 1e-10)
	near(t, "kept of all", m.KeptOfAll, .753754315508, 1e-10)
	near(t, "kept", m.Kept, .867913429648, 1e-10)
	for city, want := range map[string][2]float64{"Athens": {2290.27467963145, 1798.8029280853}, "Stockholm": {839.44591116954, 1836.7905503932}} {
		i := slices.Index(d.Names, city)
		for k := range 2 {
			near(t, city, math.Abs(m.Coordinates.At(i, k)), want[k], 1e-9)
		}
	}
}

// A tree's transport distances are of negative type (Evans & Matsen 2012): the
// roots of distances along a star map without negative eigenvalues.
func TestCoordinatesOfNegativeType(t *testing.T) {
	arms := []float64{1, 2, 3, 5, 8}
	d := &pairwise.Matrix{}
	for i, a := range arms {
		d.Names = append(d.Names, string(rune('a'+i)))
		for _, b := range arms[i+1:] {
			d.Value = append(d.Value, math.Sqrt(a+b))
		}
	}
	m, err := inference.Coordinates(d, 4)
	if err != nil {
		t.Fatal(err)
	}
	if least := slices.Min(m.Eigenvalues); least < -1e-12*m.Eigenvalues[0] {
		t.Errorf("least eigenvalue %v", least)
	}
	near(t, "kept", m.Kept, 1, 1e-12)
}

// Heights computed with R's hclust; scipy agrees.
func TestCluster(t *testing.T) {
	us, _ := table(t, inside("uscities.csv"), false)
	europe, _ := table(t, inside("eurodist.csv"), false)
	for _, c := range []struct {
		d           *pairwise.Matrix
		linkage     inference.Linkage
		first, last []float64
	}{
		{us, inference.Average, []float64{205, 347, 587, 650.25, 818.5, 879, 951.75, 1223.2, 1975.047619047619}, nil},
		{us, inference.Complete, []float64{205, 347, 587, 748, 879, 959, 1188, 1726, 2734}, nil},
		{us, inference.Single, []float64{205, 347, 543, 587, 604, 678, 701, 831, 879}, nil},
		{us, inference.Ward, nil, []float64{3871.466183440559}},
		{europe, inference.Average, []float64{158, 172, 237.5, 280}, []float64{1356.861111111111, 1977.733333333333, 2374.263157894737}},
	} {
		tree, err := inference.Cluster(c.d, c.linkage)
		if err != nil {
			t.Fatal(err)
		}
		last := len(tree.Merges) - len(c.last)
		for k, want := range c.first {
			near(t, "height", tree.Merges[k].Height, want, 1e-12)
		}
		for k, want := range c.last {
			near(t, "height", tree.Merges[last+k].Height, want, 1e-12)
		}
	}
	tree, _ := inference.Cluster(us, inference.Average)
	near(t, "cophenetic correlation", tree.CopheneticCorrelation(us), .810193699879774, 1e-12)
}

// Benjamini & Hochberg 1995, with adjusted values computed by R's p.adjust.
func TestAdjust(t *testing.T) {
	p := []float64{.0001, .0004, .0019, .0095, .0201, .0278, .0298, .0344, .0459, .3240, .4262, .5719, .6528, .7590, 1}
	bh := []float64{.0015, .003, .0095, .035625, .0603, .4470 / 7, .4470 / 7, .0645, .0765, .486, .581181818182, .714875, .753230769231, .813214285714, 1}
	holm := []float64{.0015, .0056, .0247, .114, .2211, .278, .278, .278, .3213, 1, 1, 1, 1, 1, 1}
	order := []int{7, 3, 11, 0, 14, 5, 9, 1, 13, 2, 8, 12, 4, 10, 6} // any order will do
	shuffled := make([]float64, len(p))
	for k, at := range order {
		shuffled[at] = p[k]
	}
	gotBH, gotHolm := inference.BenjaminiHochberg(shuffled), inference.Holm(shuffled)
	for k, at := range order {
		near(t, "false discovery", gotBH[at], bh[k], 1e-11)
		near(t, "Holm", gotHolm[at], holm[k], 1e-11)
	}
}
