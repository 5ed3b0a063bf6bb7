// Package graphio holds the data barrow works on, a Network, Samples of mass
// over its nodes and Groups of samples, and every reader, writer and check of
// them.
//
// Most users need two calls:
//
//	net, _, err := graphio.ReadNetwork("edges.csv", "nodes.csv", graphio.NetworkOptions{})
//	samples, _, err := graphio.ReadSamples("samples.csv", net, graphio.SampleOptions{})
//
// Nodes are numbered 0..n-1 in the order of the nodes file, or of first
// appearance among the edges; edges 0..m-1 in file order. Lengths are the
// ground distance along an edge and carry the unit of every distance computed
// later; weights say how readily mass diffuses over an edge and have no unit.
//
// Whatever is wrong with an input comes back as Faults: file, line, column,
// what was found and what would do.
package graphio
