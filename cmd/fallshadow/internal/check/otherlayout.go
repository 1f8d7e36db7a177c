package check

import (
	"context"
	"errors"
	"fmt"
	"maps"
	"path"
	"slices"
	"strings"

	"fallshadow/imageio"
	"fallshadow/imageio/fault"
)

// otherLayout guesses at the layout of what this one cannot read: one file a frame, by
// names that differ in their last word or in their folder; or several frames in a file,
// by a look into a few.
func (v *visit) otherLayout() string {
	var files []string
	for _, s := range v.look.Shots {
		if s.Err != nil && !errors.Is(s.Err, fault.Truncated) {
			for _, f := range s.Files {
				files = append(files, f.Path)
			}
		}
	}
	if v.Settings.Shots.Layout == "files" {
		for _, s := range v.look.Strays {
			files = append(files, s.Path)
		}
		return v.inOneFile(files)
	}
	return oneFileAFrame(files)
}

const oneLayout = "a night has one layout: correct [shots], or give these files a folder of their own"

// oneFileAFrame looks for files that share all of their name but the last word, or all but
// the folder, and tells of the words that most of them have.
func oneFileAFrame(files []string) string {
	for _, cut := range []func(string) (stem, rest string){lastWord, lastFolder} {
		of := map[string][]string{}
		for _, f := range files {
			if stem, rest := cut(f); rest != "" && strings.Trim(rest, "_-.0123456789/") != "" {
				of[stem] = append(of[stem], f)
			}
		}
		shots, example := map[string]int{}, map[string][]string{}
		best := ""
		for _, stem := range slices.Sorted(maps.Keys(of)) {
			var rests []string
			for _, f := range of[stem] {
				_, rest := cut(f)
				rests = append(rests, rest)
			}
			set := quoted(rests)
			if len(rests) < 2 || len(rests) > 4 {
				continue
			}
			if shots[set]++; shots[set] > shots[best] {
				best = set
			}
			if example[set] == nil {
				example[set] = of[stem]
			}
		}
		if best != "" {
			return fmt.Sprintf("%s look like one file a frame: layout = \"files\" with suffixes = [%s], in the order of planes; %s",
				strings.Join(example[best], ", "), best, oneLayout)
		}
	}
	return ""
}

// lastWord cuts a path without its ending before the last _, - or point.
func lastWord(file string) (stem, rest string) {
	name := strings.TrimSuffix(file, path.Ext(file))
	i := strings.LastIndexAny(name, "_-.")
	if i <= strings.LastIndexByte(name, '/') {
		return name, ""
	}
	return name[:i], name[i:]
}

// lastFolder takes the innermost folder out of a path.
func lastFolder(file string) (stem, rest string) {
	dir, base := path.Split(file)
	if dir == "" {
		return file, ""
	}
	outer, folder := path.Split(strings.TrimSuffix(dir, "/"))
	return outer + strings.TrimSuffix(base, path.Ext(base)), folder + "/"
}

func quoted(words []string) string {
	var all []string
	for _, w := range words {
		all = append(all, fmt.Sprintf("%q", w))
	}
	return strings.Join(all, ", ")
}

// inOneFile tries whether files hold all frames of a shot.
func (v *visit) inOneFile(files []string) string {
	const looked = 3
	for _, f := range files[:min(len(files), looked)] {
		for _, planes := range [][]imageio.Role{nil, {imageio.Atoms, imageio.Light}, {imageio.Atoms, imageio.Light, imageio.Dark, imageio.DarkOfLight}} {
			l := imageio.Layout{Kind: "cube", Planes: planes}
			s := imageio.Shot{Name: f, Files: []imageio.ShotFile{{Path: f, Role: imageio.Unused}}}
			raw, err := imageio.Read(context.Background(), v.Dir, s, l)
			if err == nil {
				return fmt.Sprintf("%s holds %d frames, as with layout = \"cube\"; %s", f, count(raw).frames, oneLayout)
			}
		}
	}
	return ""
}
