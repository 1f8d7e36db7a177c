package main

import (
	"fmt"
	"os"
	"path/filepath"
	"strings"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/night"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/cmd/fallshadow/internal/settings"
)

// misuse is an error of the command line for which nothing was run.
type misuse struct{ error }

// inNight is the folder of a night that no shot is looked for in, so that results may be there.
const inNight = "results"

// sources are the files that a command reads and that it must not write over. What is empty
// is not used.
type sources struct {
	night    string // folder of the shots
	settings string // file in use
	results  string // folder of the ledger
}

// sourcesOf are those of a night; what is left out on the command line is completed.
func sourcesOf(nightDir, settingsFile, out string) (sources, error) {
	s := sources{nightDir, settingsFile, out}
	if s.settings == "" {
		s.settings = filepath.Join(nightDir, settings.FileName)
	}
	if s.results == "" {
		var err error
		if s.results, err = night.Results(nightDir); err != nil {
			return s, err
		}
	}
	return s, nil
}

// refuse fails with a misuse where one of the files to write is a source: it lies in the
// night, whatever links lead there, or is the settings, the ledger or the table of batch.
func (s sources) refuse(files ...string) error {
	for _, file := range files {
		if err := s.refuseInNight(file); err != nil {
			return err
		}
		for _, own := range s.own() {
			if sameFile(file, own.file) {
				return misuse{fmt.Errorf("%s is %s, which is not written over: give another name", file, own.what)}
			}
		}
	}
	return nil
}

// refuseResults fails with a misuse where the folder of results, the usual one if out is
// empty, would be among the shots: the next run would take its pictures for some.
func refuseResults(nightDir, out string) error {
	s, err := sourcesOf(nightDir, "", out)
	if err != nil {
		return err
	}
	return s.refuseInNight(s.results)
}

// names are file names as text.
func names[T ~string](files []T) []string {
	list := make([]string, len(files))
	for i, f := range files {
		list[i] = string(f)
	}
	return list
}

// own are the files that are known by name.
func (s sources) own() (list []struct{ file, what string }) {
	add := func(file, what string) { list = append(list, struct{ file, what string }{file, what}) }
	if s.settings != "" {
		add(s.settings, "the settings in use")
	}
	if s.results != "" {
		for _, name := range ledger.Files {
			add(filepath.Join(s.results, name), "part of the ledger of the night")
		}
		add(filepath.Join(s.results, report.CSVName), "the table of batch")
	}
	return list
}

// refuseInNight fails for what lies in the night but not in its folder of results. A link
// is looked at as what it is and as what it leads to.
func (s sources) refuseInNight(file string) error {
	root, err := os.Stat(s.night)
	if s.night == "" || err != nil {
		return nil // nothing is there yet
	}
	asNamed := filepath.Join(resolved(filepath.Dir(file)), filepath.Base(file))
	for _, path := range []string{asNamed, resolved(file)} {
		way, inside := wayFrom(root, path)
		if first, _, _ := strings.Cut(way, string(filepath.Separator)); inside && first != inNight {
			return misuse{fmt.Errorf("%s lies in the night's folder %s, which is only read: choose a place outside of it, or %s in it, where no shots are looked for",
				file, s.night, filepath.Join(s.night, inNight))}
		}
	}
	return nil
}

// wayFrom tells whether a path is a folder or lies in it, and its way from there. Folders
// are compared as the system knows them, so that the case of letters hides none.
func wayFrom(root os.FileInfo, path string) (way string, inside bool) {
	for at := path; ; at = filepath.Dir(at) {
		if info, err := os.Stat(at); err == nil && os.SameFile(info, root) {
			return way, true
		}
		if filepath.Dir(at) == at {
			return "", false
		}
		way = filepath.Join(filepath.Base(at), way)
	}
}

// resolved is the absolute path without links, as far as the path is there.
func resolved(path string) string {
	abs, err := filepath.Abs(path)
	if err != nil {
		return path
	}
	rest := ""
	for at := abs; ; at = filepath.Dir(at) {
		if real, err := filepath.EvalSymlinks(at); err == nil {
			return filepath.Join(real, rest)
		}
		if filepath.Dir(at) == at {
			return abs
		}
		rest = filepath.Join(filepath.Base(at), rest)
	}
}

// sameFile reports whether two paths are one file, be it there yet or not.
func sameFile(a, b string) bool {
	x, err := os.Stat(a)
	if err != nil {
		return resolved(a) == resolved(b)
	}
	y, err := os.Stat(b)
	return err == nil && os.SameFile(x, y)
}
