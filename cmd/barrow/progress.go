package main

import (
	"fmt"
	"io"
	"math"
	"os"
	"sync"
	"time"

	"github.com/schollz/progressbar/v3"
	"golang.org/x/term"
)

// stageText says what a stage does while its bar is shown.
var stageText = map[string]string{
	"embed":     "vectors of the samples",
	"calibrate": "pairs solved exactly to calibrate",
	"estimate":  "pairs estimated",
	"exact":     "pairs solved exactly",
	"noise":     "draws of noise",
	"resample":  "redrawings of the groups",
}

// progress shows one bar a stage, on a terminal only.
type progress struct {
	lock  sync.Mutex
	to    io.Writer // nil: show nothing
	stage string
	bar   *progressbar.ProgressBar
}

// progressTo shows progress on w if it is a terminal.
func (p *progress) progressTo(w io.Writer) {
	if f, ok := w.(*os.File); ok && term.IsTerminal(int(f.Fd())) {
		p.to = w
	}
}

// shown says whether anybody sees it.
func (p *progress) shown() bool { return p.to != nil }

// interval shows what is proved so far of a single pair.
func (p *progress) interval(lower, upper float64) {
	p.lock.Lock()
	defer p.lock.Unlock()
	if p.to == nil {
		return
	}
	if p.stage != "pair" {
		p.finish()
		p.stage = "pair"
		p.bar = progressbar.NewOptions(-1,
			progressbar.OptionSetWriter(p.to),
			progressbar.OptionSpinnerType(9),
			progressbar.OptionClearOnFinish())
	}
	gap := "no way along the one-way edges yet"
	if !math.IsInf(upper, 1) {
		gap = fmt.Sprintf("at most %s, gap %s", human(upper), percent((upper-lower)/upper))
	}
	p.bar.Describe(fmt.Sprintf("at least %s, %s", human(lower), gap))
	p.bar.Add(1)
}

func (p *progress) report(stage string, done, total int) {
	p.lock.Lock()
	defer p.lock.Unlock()
	if p.to == nil {
		return
	}
	if p.stage != stage {
		p.finish()
		p.stage = stage
		p.bar = progressbar.NewOptions(total,
			progressbar.OptionSetWriter(p.to),
			progressbar.OptionSetDescription(stageText[stage]),
			progressbar.OptionSetPredictTime(true),
			progressbar.OptionShowCount(),
			progressbar.OptionSetWidth(24),
			progressbar.OptionThrottle(100*time.Millisecond),
			progressbar.OptionClearOnFinish())
	}
	p.bar.Set(done)
}

// end takes the bar away.
func (p *progress) end() {
	p.lock.Lock()
	defer p.lock.Unlock()
	p.finish()
}

func (p *progress) finish() {
	if p.bar != nil {
		p.bar.Finish()
		p.bar.Clear()
	}
	p.bar, p.stage = nil, ""
}
