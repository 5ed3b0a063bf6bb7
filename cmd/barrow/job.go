package main

import "io"

// A job is a run of a command from its loaded inputs to its results.
type job struct {
	*session
	set      *settings
	d        *data
	rest     []string // arguments that are no flags
	recorded *record  // the run that is repeated; nil for others
	rec      *record
	f        *folder // nil where nothing is kept
}

// open reads the command line, whose values check may refuse, loads the inputs
// and claims the folder for the results. A nil job without an error has nothing
// left to do. The caller discards the folder in the end.
func (s *session) open(set *settings, args []string, check func(rest []string) error) (*job, error) {
	rest, err := set.parse(args)
	if err != nil {
		return nil, err
	}
	recorded, rest, err := s.settle(set, rest)
	if err != nil {
		return nil, err
	}
	if err := check(rest); err != nil {
		return nil, err
	}
	s.progress.progressTo(s.stderr)
	d, err := s.load(set)
	if err != nil {
		return nil, err
	}
	if recorded != nil {
		if err := recorded.sameFiles(d.inputs); err != nil {
			return nil, err
		}
	}
	j := &job{session: s, set: set, d: d, rest: rest, recorded: recorded, rec: s.newRecord(set, rest, d)}
	if set.out == "" && recorded == nil {
		return j, nil
	}
	f, same, err := openFolder(set.out, set.replace, j.rec)
	if same || err != nil {
		f.discard()
		return nil, s.already(set, err)
	}
	j.f = f
	return j, nil
}

// finish writes the results, where they are kept, and prints the summary.
func (j *job) finish(write func(f *folder) error, summary func(w io.Writer)) error {
	j.progress.end()
	if j.f == nil {
		summary(j.stdout)
		return nil
	}
	if err := j.phases.Time("write", func() error { return write(j.f) }); err != nil {
		return err
	}
	return j.close(j.f, j.rec, j.recorded, summary)
}

// flagsOnly refuses arguments.
func flagsOnly(rest []string) error {
	if len(rest) > 0 {
		return usageError{"\"" + rest[0] + "\", where only flags are taken"}
	}
	return nil
}

// severalSamples refuses a collection of fewer than two.
func (d *data) severalSamples(set *settings) error {
	if d.samples != nil && d.samples.Len() < 2 {
		return oneFault(set.samples, several(d.samples.Len(), "sample"), "two samples or more to compare")
	}
	return nil
}
