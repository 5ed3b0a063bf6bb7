// Package diffusion lets mass diffuse over a network: the random walk of its
// weights, the heat kernel exp(-tL) on many samples at once, and a hierarchy
// of coarser networks on which late times are cheap.
//
// Most users need two calls:
//
//	walk := diffusion.NewWalk(net)
//	heat, err := walk.Heat(x, []float64{1, 2, 4}, diffusion.HeatOptions{})
//
// With A the weights of the edges and D = diag(degree), degree being the sum
// of the weights at a node, the walk moves the share A_uv/D_v of the mass at v
// to u in one step: P = A D⁻¹ acts on columns of mass. L = I - P has its
// spectrum in [0, 2] whatever the weights, exp(-tL) keeps the total mass, and
// every component tends to degree/Σdegree. Time is counted in mean steps of
// the walk and has no unit. A node without edges keeps its mass. On one-way
// networks the walk runs on the network without its directions; of two
// opposite one-way edges it takes the larger weight.
//
// Sources: Chung 1997, Spectral Graph Theory; Abramowitz & Stegun 1964,
// 9.6.34 (Chebyshev series of the exponential); Coifman & Maggioni 2006
// (dyadic powers of a diffusion on ever coarser levels).
package diffusion
