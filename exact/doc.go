// Package exact finds the transport cost between two samples on a network and
// proves it.
//
// Most users need one call, or a Solver for many pairs on one network:
//
//	r, err := exact.Solve(net, p, q, exact.Options{Shares: true})
//	fmt.Println(r.Distance(), r.Verify())
//
// With p and q of equal total, the cost is the least Σ ℓ_e |f_e| over flows f
// with div f = p − q (Beckmann 1952). Its dual is the largest φ·(p − q) over
// potentials φ that change by no more than ℓ_e along any edge (Kantorovich &
// Rubinstein 1958). A result carries a flow and a potential; where their
// values meet, both are optimal, and Verify checks just that from scratch.
//
// The method is the network simplex (Ahuja, Magnanti & Orlin 1993, ch. 11) in a
// form for edges that run both ways without capacity: every spanning tree
// carries a feasible flow for every pair of samples, so any tree starts any
// pair, and a pivot is an exact line search along its cycle. Masses and lengths
// are scaled to integers, a unit of perturbation at every node rules out
// degenerate pivots, and so each pivot lowers the cost strictly and the method
// ends.
//
// Cost: about n pivots of O(cycle + √n) each in practice; 32 + 16 bytes a node
// and 32 an edge, besides the network and the result.
package exact
