package main

import "golang.org/x/sys/cpu"

func kernels() []kernel {
	var list []kernel
	if cpu.X86.HasAVX2 {
		list = append(list, kernel{64, peakAVX2})
	}
	if cpu.X86.HasAVX512F && cpu.X86.HasAVX512DQ {
		list = append(list, kernel{128, peakAVX512})
	}
	return list
}

// peakAVX2 takes 64 absolute differences a round, peakAVX512 128.
func peakAVX2(rounds int)
func peakAVX512(rounds int)
