// Package dual compares distributions on a network from vectors that are made
// once for each sample: the multiscale estimator of the transport distance,
// its witness, flows that bound the distance of every pair from above, certified
// lower bounds from any potential, kernel discrepancy and total variation.
//
// Most users need three calls:
//
//	m, err := dual.NewMultiscale(net, dual.Options{})
//	e, err := m.Embed(ctx, samples, 0, nil)
//	d := e.Distance(0, 1, e.Theory()) // without calibration: no unit
//
// The estimator is M(p,q) = Σ_k c_k ‖(H_{t_k} - H_{t_{k+1}})(p - q)‖₁ with H
// the heat kernel of the network's walk, dyadic times t_k and c_k growing as
// t_k^{α/2}: an L1 distance between linear embeddings, equivalent up to
// constants to the transport distance for the ground distance d^α (Leeb &
// Coifman 2016). Terms add flows to the scales, Weigh makes one L1 distance of
// them, and weights fitted to exact distances give that the unit of the lengths
// (package pairwise).
package dual
