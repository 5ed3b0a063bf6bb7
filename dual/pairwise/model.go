package pairwise

import (
	"context"
	"crypto/sha256"
	"encoding/binary"
	"encoding/hex"
	"encoding/json"
	"fmt"
	"io"
	"math"

	"example.org/barrow/dual"
	"example.org/barrow/graphio"
)

// A Model is all it takes to make the vector of any further sample of the same
// network, so that it compares with those it was calibrated on as if it had
// been among them.
type Model struct {
	Format    string   `json:"format"`
	Nodes     int      `json:"nodes"`
	Edges     int      `json:"edges"`
	Network   string   `json:"network"` // SHA-256 of nodes and edges as they stand
	Mass      string   `json:"mass"`    // share or amount
	Unmatched float64  `json:"unmatched"`
	Quality   *Quality `json:"calibration"`
	// Terms and their weights: see dual.Terms.
	Terms   []string  `json:"terms"`
	Weights []float64 `json:"weights"`
	Groups  int       `json:"groups"`
	// Flows lists the conductance of each edge for each flow; null stands for
	// 1/length. The last one also says how much each edge is used.
	Flows [][]float64 `json:"flows"`
	// Witnesses make one more term, see potentials, of the given weight; none where the estimate is to be an L1 norm.
	Witnesses     []potentials `json:"witnesses,omitempty"`
	WitnessWeight float64      `json:"witness_weight,omitempty"`
}

// Quality is how a calibration came about and how good it is; what is not
// known is left out.
type Quality struct {
	Pairs       int      `json:"pairs"`
	HeldOut     int      `json:"held_out"`
	Spearman    *float64 `json:"spearman,omitempty"`
	MedianError *float64 `json:"median_error,omitempty"`
	P95         *float64 `json:"p95_error,omitempty"`
}

const modelFormat = "barrow calibration 1"

// WriteTo writes the model as JSON.
func (m *Model) WriteTo(w io.Writer) (int64, error) {
	text, err := json.Marshal(m)
	if err != nil {
		return 0, err
	}
	n, err := w.Write(append(text, '\n'))
	return int64(n), err
}

// ReadModel reads what WriteTo wrote. Errors: text that is no model.
func ReadModel(r io.Reader) (*Model, error) {
	m := &Model{}
	if err := json.NewDecoder(r).Decode(m); err != nil {
		return nil, fmt.Errorf("no calibration: %w", err)
	}
	if m.Format != modelFormat || m.Quality == nil {
		return nil, fmt.Errorf("format %q; want %q", m.Format, modelFormat)
	}
	if len(m.Terms) != len(m.Weights) {
		return nil, fmt.Errorf("%d weights for %d terms; want one a term", len(m.Weights), len(m.Terms))
	}
	for i, w := range m.Weights {
		if !(w >= 0) || math.IsInf(w, 1) {
			return nil, fmt.Errorf("weight %v of term %q; want a finite weight of 0 or more", w, m.Terms[i])
		}
	}
	for _, w := range m.Witnesses {
		if len(w) != m.Nodes {
			return nil, fmt.Errorf("a witness of %d values for %d nodes; want one a node", len(w), m.Nodes)
		}
	}
	return m, nil
}

// fits refuses another network or another way of comparing.
func (m *Model) fits(net *graphio.Network, opt Options) error {
	var faults graphio.FaultList
	if m.Network != fingerprint(net) {
		faults.Add(graphio.Fault{
			Found: fmt.Sprintf("a calibration for another network, of %d nodes and %d edges; this one has %d and %d, or other lengths, or its rows in another order", m.Nodes, m.Edges, net.Order(), net.Size()),
			Want:  "the network files it was made on",
		})
	}
	if opt.KeepVectors && len(m.Witnesses) > 0 {
		faults.Add(graphio.Fault{
			Found: "a calibration with a term of proofs, which is no L1 distance of vectors",
			Want:  "one that was made with --vectors",
		})
	}
	if m.Mass != massWord(opt.Shares) {
		faults.Add(graphio.Fault{Found: fmt.Sprintf("a calibration that compares %ss", m.Mass), Want: "--mass " + m.Mass})
	}
	if m.Unmatched != opt.Unmatched {
		faults.Add(graphio.Fault{Found: fmt.Sprintf("a calibration with a cost of unmatched mass of %v", m.Unmatched), Want: fmt.Sprintf("--unmatched %v", m.Unmatched)})
	}
	return faults.Err()
}

func massWord(shares bool) string {
	if shares {
		return "share"
	}
	return "amount"
}

// fingerprint tells networks apart: names, edges, lengths and weights in their
// order.
func fingerprint(net *graphio.Network) string {
	h := sha256.New()
	var line []byte
	for v := range net.Order() {
		line = append(append(line[:0], net.Name(v)...), 0)
		h.Write(line)
	}
	for _, e := range net.EdgeList() {
		line = binary.LittleEndian.AppendUint32(line[:0], uint32(e.From))
		line = binary.LittleEndian.AppendUint32(line, uint32(e.To))
		line = binary.LittleEndian.AppendUint64(line, math.Float64bits(e.Length))
		line = binary.LittleEndian.AppendUint64(line, math.Float64bits(e.Weight))
		h.Write(line)
	}
	return hex.EncodeToString(h.Sum(nil))
}

// Estimator makes vectors of the model's weights, whose L1 distances are its
// estimates (Options.KeepVectors), for the network it was made on.
func (m *Model) Estimator(net *graphio.Network) (*dual.Estimator, error) {
	if err := m.fits(net, Options{Shares: m.Mass == massWord(true), Unmatched: m.Unmatched, KeepVectors: true}); err != nil {
		return nil, err
	}
	t, err := m.terms(net)
	if err != nil {
		return nil, err
	}
	return t.Weigh(m.Weights)
}

// terms prepares what the weights are of.
func (m *Model) terms(net *graphio.Network) (*dual.Terms, error) {
	opt := dual.TermOptions{Flows: m.Flows, Groups: m.Groups, Unmatched: m.Unmatched}
	if net.Order() <= small {
		opt.Width = 4
	}
	if len(m.Flows) > 0 {
		opt.Use = use(net, m.Flows[len(m.Flows)-1], m.Unmatched)
	}
	return dual.NewTerms(net, opt)
}

// use is the conductance of each edge times its length: 0 to 1.
func use(net *graphio.Network, conductance []float64, unmatched float64) []float64 {
	u := make([]float64, len(conductance))
	for e, c := range conductance {
		length := unmatched
		if e < net.Size() {
			length = net.EdgeList()[e].Length
		}
		u[e] = c * length
	}
	return u
}

// newModel finds the conductances for a network on the pairs to be fitted.
func newModel(ctx context.Context, net *graphio.Network, fitted []dual.Pair, opt Options) (*Model, error) {
	m := &Model{
		Format: modelFormat, Nodes: net.Order(), Edges: net.Size(), Network: fingerprint(net),
		Mass: massWord(opt.Shares), Unmatched: opt.Unmatched,
		Groups: max(1, min(8, len(fitted)/4)),
	}
	conductance, err := dual.Reweight(ctx, net, fitted, opt.Unmatched, rounds(net), opt.Threads)
	if err != nil {
		return nil, err
	}
	if net.Order() <= small {
		m.Flows = append(m.Flows, nil)
	}
	m.Flows = append(m.Flows, conductance)
	return m, nil
}

// rounds is how often conductances are fitted.
func rounds(net *graphio.Network) int {
	if net.Order() > 200_000 {
		return 3 // each costs as much as embedding dozens of samples
	}
	return 6
}

// small is the number of nodes up to which vectors may be longer: with the plain
// resistor flow among the terms and scales on finer levels, which helps a
// little, most on networks that coarsen badly.
const small = 5000
