package graphio

import "fmt"

// ReadGroups reads labels of samples from a table whose column sample names
// them; every other column is a factor. Samples without a row have the label
// "", with a warning. Errors: *Faults, also for samples that are not among the
// given ones. Cost: O(bytes).
func ReadGroups(path string, samples *Samples) (*Groups, *Source, error) {
	var faults FaultList
	t, err := openTable(path, groupsFile, 0, &faults)
	if err != nil {
		return nil, nil, err
	}
	defer t.in.close()
	c := t.columns()
	if !c.has("sample") || len(t.header) < 2 || c.has("node") || c.has("value") {
		return nil, nil, t.wrongHeader("")
	}
	at := c.at("sample")
	var factors []string
	seen := map[string]bool{}
	for i, h := range t.header {
		if i == at {
			continue
		}
		if h == "" || seen[h] {
			faults.Add(t.fault(i, fmt.Sprintf("column %q", h), "a name of its own for each column"))
		}
		seen[h] = true
		factors = append(factors, h)
	}
	rows := make(map[string][]string)
	line := make(map[string]int)
	spell := speller{names: samples.Names}
	for t.row() {
		if !t.sameWidth() {
			continue
		}
		name := string(t.fields[at])
		if _, known := samples.Index(name); !known {
			found, want := nameFault(t.fields[at], "sample")
			if found == "" {
				found, want = fmt.Sprintf("sample %s, which is not among the samples%s", show(t.fields[at]), spell.hint(t.fields[at])), "a sample of the samples file"
			}
			faults.Add(t.fault(at, found, want))
			continue
		}
		if first := line[name]; first > 0 {
			faults.Add(t.fault(at, fmt.Sprintf("sample %q again, as on line %d", name, first), "each sample once"))
			continue
		}
		line[name] = t.line
		var row []string
		for i, f := range t.fields {
			if i != at {
				row = append(row, string(f))
			}
		}
		rows[name] = row
	}
	if err := t.err(); err != nil {
		return nil, nil, err
	}
	if err := faults.Err(); err != nil {
		return nil, nil, err
	}
	file, err := t.in.finish()
	if err != nil {
		return nil, nil, err
	}
	source := &Source{Files: []InputFile{file}, Rows: len(rows)}
	if without := samples.Len() - len(rows); without > 0 {
		source.warn("%s: %d of the %d samples have no row; their labels are empty", path, without, samples.Len())
	}
	groups, err := NewGroups(factors, rows)
	return groups, source, err
}
