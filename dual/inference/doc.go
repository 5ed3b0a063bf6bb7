// Package inference says what a matrix of distances is evidence for: whether
// groups of samples differ by more than chance, where they differ, whether two
// matrices go together, which distances exceed counting noise, and what shape
// a collection has.
//
// Most users need one call:
//
//	t, err := inference.PseudoF(ctx, matrix, inference.Variable{Name: "shift", Labels: labels}, inference.Scheme{}, inference.Options{})
//	t.P // how often a rearrangement of the labels does as well
//
// Tests rearrange the samples as their design allows (Scheme) and compare. All
// rearrangements are gone through where they are no more than the number asked
// for; otherwise m of them are drawn and P is (b+1)/(m+1), with b the number
// that reach the observed statistic, never 0 (Phipson & Smyth 2010). Each has a
// random stream of its own made from the seed and its number: results do not
// depend on the number of threads.
//
// A small P is evidence of a difference, not of its size or cause.
package inference
