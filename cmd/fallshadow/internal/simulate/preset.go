package simulate

import (
	"embed"
	"fmt"
	"path"
	"strings"
)

// A preset is a folder of presets with a scenario and the settings of its laboratory.
//
//go:embed presets
var presets embed.FS

// Listed is a preset by the name that Preset takes.
type Listed struct {
	Preset   string
	Scenario Scenario
}

// Presets returns the scenarios that come with the program, in order of their names.
func Presets() ([]Listed, error) {
	var list []Listed
	for _, name := range presetNames() {
		s, _, err := Preset(name)
		if err != nil {
			return nil, err
		}
		list = append(list, Listed{name, s})
	}
	return list, nil
}

// Preset returns a scenario by name with the settings of its laboratory. The error lists
// the known names.
func Preset(name string) (Scenario, []byte, error) {
	data, err := presets.ReadFile(path.Join("presets", name, ScenarioFile))
	if err != nil {
		return Scenario{}, nil, fmt.Errorf("unknown preset %q: known are %s", name, strings.Join(presetNames(), ", "))
	}
	s, err := Parse(data, "preset "+name)
	if err != nil {
		return s, nil, err
	}
	lab, err := presets.ReadFile(path.Join("presets", name, "fallshadow.toml"))
	return s, lab, err
}

func presetNames() []string {
	folders, _ := presets.ReadDir("presets")
	names := make([]string, len(folders))
	for i, f := range folders {
		names[i] = f.Name()
	}
	return names
}
