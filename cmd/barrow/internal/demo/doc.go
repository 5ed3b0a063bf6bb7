// Package demo invents a harbour town: its streets, the vehicles counted at
// every junction in each hour of two weeks, and a bridge that is closed in the
// second. Every name and number is made up; the town is no real place.
//
//	town := demo.New(1)
//	for _, f := range town.Files() { … f.Name, f.Data … }
//
// The same seed gives the same bytes on any processor: chance comes from PCG,
// products are rounded before they are added, and no function is used whose
// last digit is left to the processor. Cost: about a second.
package demo
