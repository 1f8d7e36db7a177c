package main

import (
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"os/exec"
	"strings"
	"testing"
)

// layer says what the packages below a path may import, beside the standard library.
type layer struct {
	below   string   // of the module, "" for all; the first that fits is the layer
	may     []string // paths, each with all below it
	mustNot []string // of the standard library and of what may allows
}

const gonum = "gonum.org/v1/gonum"

// layers is the import table of the house, the innermost paths first.
var layers = []layer{
	{below: "model/bose", mustNot: outside},
	{below: "model", may: []string{gonum, "fallshadow/model"}, mustNot: outside},
	{below: "fit/lm", may: []string{gonum}, mustNot: outside},
	{below: "fit", may: []string{gonum, "fallshadow/model", "fallshadow/fit"}, mustNot: outside},
	{below: "imageio", may: []string{gonum, "github.com/astrogo/fitsio", "golang.org/x/image", "fallshadow/imageio"}},
	{below: "cmd/fallshadow/internal/ledger", may: everything, mustNot: frames},
	{below: "cmd/fallshadow/internal/figure", may: everything, mustNot: append([]string{"database/sql", "modernc.org"}, frames...)},
	{below: "cmd/fallshadow/internal/simulate", may: everything, mustNot: append([]string{"fallshadow/fit"}, alone...)},
	{below: "", may: everything, mustNot: alone},
}

var (
	everything = []string{""}
	// outside is what physics and fits must not see.
	outside = []string{"os", "net", "database/sql"}
	// frames are the libraries that only imageio sees.
	frames = []string{"github.com/astrogo/fitsio", "golang.org/x/image/tiff"}
	// alone are the libraries that have one package of their own to see them.
	alone = append([]string{"database/sql", "modernc.org", "gonum.org/v1/plot"}, frames...)
)

// violations returns the imports of a package that the table forbids.
func violations(pkg string, imports []string) (wrong []string) {
	place := strings.TrimPrefix(strings.TrimPrefix(pkg, "fallshadow"), "/")
	for _, l := range layers {
		if !within(place, l.below) {
			continue
		}
		for _, path := range imports {
			first, _, _ := strings.Cut(path, "/")
			standard := !strings.Contains(first, ".") && first != "fallshadow"
			if !standard && !withinAny(path, l.may) || withinAny(path, l.mustNot) {
				wrong = append(wrong, fmt.Sprintf("%s imports %s", pkg, path))
			}
		}
		return wrong
	}
	return nil
}

func within(path, root string) bool {
	return root == "" || path == root || strings.HasPrefix(path, root+"/")
}

func withinAny(path string, roots []string) bool {
	for _, r := range roots {
		if within(path, r) {
			return true
		}
	}
	return false
}

func TestLayersHold(t *testing.T) {
	cmd := exec.Command("go", "list", "-e", "-json=ImportPath,Imports", "fallshadow/...")
	out, err := cmd.Output()
	if err != nil {
		t.Fatal(err)
	}
	seen := 0
	for d := json.NewDecoder(strings.NewReader(string(out))); ; seen++ {
		var p struct {
			ImportPath string
			Imports    []string
		}
		if err := d.Decode(&p); errors.Is(err, io.EOF) {
			break
		} else if err != nil {
			t.Fatal(err)
		}
		for _, w := range violations(p.ImportPath, p.Imports) {
			t.Error(w)
		}
	}
	if seen < 10 {
		t.Errorf("only %d packages were looked at", seen)
	}
}

// The table itself can fail: what it must refuse, and what it must not.
func TestLayersBite(t *testing.T) {
	tests := []struct {
		pkg, path string
		ok        bool
	}{
		{"fallshadow/model", "math", true},
		{"fallshadow/model", "os", false},
		{"fallshadow/model", "fallshadow/fit", false},
		{"fallshadow/model", "net/http", false},
		{"fallshadow/model/numbers", "fallshadow/model", true},
		{"fallshadow/model/bose", gonum + "/mat", false},
		{"fallshadow/fit", "os", false},
		{"fallshadow/fit", "os/exec", false},
		{"fallshadow/fit", "fallshadow/imageio", false},
		{"fallshadow/fit", "fallshadow/fit/lm", true},
		{"fallshadow/fit/lm", "fallshadow/model", false},
		{"fallshadow/fit/bound", "database/sql", false},
		{"fallshadow/imageio/light", "fallshadow/model", false},
		{"fallshadow/imageio/synth", "fallshadow/fit", false},
		{"fallshadow/imageio/fits", "github.com/astrogo/fitsio", true},
		{"fallshadow/imageio", "github.com/alecthomas/kong", false},
		{"fallshadow/imageio", "os", true},
		{"fallshadow/cmd/fallshadow/internal/night", "github.com/astrogo/fitsio", false},
		{"fallshadow/cmd/fallshadow/internal/night", "fallshadow/fit", true},
		{"fallshadow/cmd/fallshadow/internal/night", "database/sql", false},
		{"fallshadow/cmd/fallshadow/internal/ledger", "database/sql", true},
		{"fallshadow/cmd/fallshadow/internal/simulate", "fallshadow/fit", false},
		{"fallshadow/cmd/fallshadow", "gonum.org/v1/plot", false},
	}
	for _, test := range tests {
		if got := len(violations(test.pkg, []string{test.path})) == 0; got != test.ok {
			t.Errorf("%s importing %s is allowed: %v, want %v", test.pkg, test.path, got, test.ok)
		}
	}
}
