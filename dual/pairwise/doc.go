// Package pairwise compares all pairs of many samples on one network: by
// transport solved exactly, by estimates from vectors calibrated on pairs solved
// exactly, by upper bounds from flows, by kernel discrepancy or by total
// variation.
//
// Most users need one call:
//
//	r, err := pairwise.Multiscale(ctx, net, samples, pairwise.Options{Shares: true, Calibrate: -1})
//	d := r.Matrix.At(0, 1) // in the unit of the lengths
//
// Distances of shares are mean distances a unit of mass moves; distances of
// amounts are mass times length. Every method gives the same bits for any
// number of threads: work is cut into pieces that do not depend on it.
package pairwise
