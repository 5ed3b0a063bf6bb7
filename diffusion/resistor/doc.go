// Package resistor sends mass through a network as current through resistors:
// the flow is linear in the mass, one solve of a Laplacian a sample, and made
// exactly feasible at the end.
//
// Most users need two calls:
//
//	c, err := resistor.New(net, resistor.Options{})
//	c.Route(&panel, samples, rows, slack)
//
// With B the incidence matrix of the network, C = diag(conductance) and
// L = Bᵀ C B, the current of a distribution b that sums to 0 on every
// component is f = C B L⁺ b: of all flows with divergence b the one of least
// Σ f²/conductance (Thomson's principle). Any flow is an upper bound of the
// transport distance (Beckmann 1952); this one is made once for a sample, and
// the difference of two samples' flows is a flow between them.
//
// L is solved by Chebyshev's iteration, preconditioned by an approximate
// elimination: nodes of few neighbours are eliminated exactly, others with a
// random sample of the edges that elimination creates (Kyng & Sachdeva 2016;
// Gao, Kyng & Spielman 2023). Roads and trees come out all but exact; the number
// of steps depends on the network alone, so that the solve is one linear map.
// What it leaves over is routed along a spanning tree, exactly.
package resistor
