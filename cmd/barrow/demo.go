package main

import (
	"bytes"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strconv"
	"strings"

	"example.org/barrow/cmd/barrow/internal/demo"
	"example.org/barrow/graphio"
)

// demo invents a town, writes its files and runs the main job on them.
func (s *session) demo(args []string) error {
	set := newSettings(s.command)
	set.flags.Uint64Var(&set.seed, "seed", 1, "")
	set.flags.IntVar(&set.threads, "threads", 0, "")
	set.flags.BoolVar(&set.replace, "replace", false, "")
	rest, err := set.parse(args)
	if err != nil {
		return err
	}
	if len(rest) != 1 {
		return usageError{fmt.Sprintf("%s named; want one to write to: barrow demo harbour", several(len(rest), "folder"))}
	}
	if set.threads < 0 {
		return usageError{fmt.Sprintf("--threads %d; want 1 or more (0: all processors)", set.threads)}
	}
	dir := rest[0]
	town := demo.New(set.seed)
	if err := s.settleTown(dir, town, set); err != nil {
		return err
	}
	input := []string{
		"--edges", filepath.Join(dir, "edges.csv"), "--nodes", filepath.Join(dir, "nodes.csv"), "--samples", filepath.Join(dir, "samples.csv"),
	}
	results, _ := flagsOf(dir, "results", set)
	matrix := append(input[:len(input):len(input)], results...)
	first := s.step("matrix", matrix)
	_, r, err := first.makeMatrix(append(matrix, "--replace"))
	first.progress.end()
	if err != nil {
		return err
	}
	before, after := town.SameHours()
	names := []string{town.Samples.At(before).Name, town.Samples.At(after).Name}
	bridge, _ := flagsOf(dir, "bridge", set)
	pair := append(append(names, input...), bridge[:2]...)
	c, err := s.step("pair", pair).makePair(append(pair, "--replace"))
	if err != nil {
		return err
	}
	fmt.Fprintln(s.stdout)
	_, err = io.WriteString(s.stdout, town.Read(r.Matrix.At, c.distance))
	return err
}

// flagsOf are the flags a demo step adds to its input files.
func flagsOf(dir, out string, set *settings) (flags []string, folder string) {
	folder = filepath.Join(dir, out)
	flags = []string{"--out", folder}
	if set.flags.Changed("threads") {
		flags = append(flags, "--threads", strconv.Itoa(set.threads))
	}
	return flags, folder
}

// step shows a command as one would type it and returns a session to run it in.
func (s *session) step(command string, args []string) *session {
	typed := make([]string, len(args))
	for i, a := range args {
		if typed[i] = a; strings.ContainsAny(a, " \t'\"\\$") {
			typed[i] = strconv.Quote(a)
		}
	}
	fmt.Fprintf(s.stdout, "\n$ barrow %s %s\n", command, strings.Join(typed, " "))
	return &session{ctx: s.ctx, stdout: s.stdout, stderr: s.stderr, command: command}
}

// settleTown writes the town's files. A folder with other files of these names
// is refused unless they are to be replaced.
func (s *session) settleTown(dir string, town *demo.Town, set *settings) error {
	files := town.Files()
	for _, f := range files {
		held, err := os.ReadFile(filepath.Join(dir, f.Name))
		if err == nil && !bytes.Equal(held, f.Data) && !set.replace {
			return usageError{fmt.Sprintf("%s is there and is not of this demo; want a new folder, or --replace to write over it", filepath.Join(dir, f.Name))}
		}
	}
	if err := os.MkdirAll(dir, 0o777); err != nil {
		return err
	}
	fmt.Fprintf(s.stdout, "%s is an invented harbour town: %s and %s between them, three bridges over its\nwater, and the vehicles counted in each hour of two weeks. %s is closed in the second.\n",
		town.Name, several(town.Net.Order(), "junction"), several(town.Net.Size(), "street"), town.Bridges[town.Closed].Name)
	var names []string
	for _, f := range files {
		path := filepath.Join(dir, f.Name)
		if err := graphio.WriteAtomic(path, func(w io.Writer) error { _, err := w.Write(f.Data); return err }); err != nil {
			return err
		}
		names = append(names, path)
		if err := s.ctx.Err(); err != nil {
			return err
		}
	}
	fmt.Fprintf(s.stdout, "written   %s\n", strings.Join(names, ", "))
	return nil
}
