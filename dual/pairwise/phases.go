package pairwise

import (
	"runtime/metrics"
	"time"
)

// A Phase is what a stage of a run took.
type Phase struct {
	Name    string  `json:"name"` // load, embed, estimate, calibrate, exact, bound or write
	Seconds float64 `json:"seconds"`
	// PeakBytes is the most memory the process held during the phase, as the Go
	// runtime counts it, looked at fifty times a second.
	PeakBytes uint64 `json:"peak_bytes"`
}

// Phases lists phases in the order they ended. A nil *Phases takes nothing down.
type Phases []Phase

// Time runs do and takes down what it took, also where it fails.
func (p *Phases) Time(name string, do func() error) error {
	if p == nil {
		return do()
	}
	stop, peak := make(chan struct{}), make(chan uint64)
	go watch(stop, peak)
	begin := time.Now()
	err := do()
	seconds := time.Since(begin).Seconds()
	close(stop)
	*p = append(*p, Phase{name, seconds, <-peak})
	return err
}

func watch(stop <-chan struct{}, peak chan<- uint64) {
	tick := time.NewTicker(20 * time.Millisecond)
	defer tick.Stop()
	most := held()
	for {
		select {
		case <-tick.C:
			most = max(most, held())
		case <-stop:
			peak <- max(most, held())
			return
		}
	}
}

// held is the memory the runtime has taken from the system and not given back.
func held() uint64 {
	s := []metrics.Sample{{Name: "/memory/classes/total:bytes"}, {Name: "/memory/classes/heap/released:bytes"}}
	metrics.Read(s)
	return s[0].Value.Uint64() - s[1].Value.Uint64()
}
