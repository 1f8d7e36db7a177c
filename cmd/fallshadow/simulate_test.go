package main

import (
	"bytes"
	"context"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

func TestSimulateCommand(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "night")
	seed := uint64(5)
	var out bytes.Buffer
	first := simulateCmd{Folder: dir, Preset: "demo", Shots: 1, Seed: &seed}
	if err := first.Run(context.Background(), &out); err != nil {
		t.Fatal(err)
	}
	if !strings.Contains(out.String(), "1 simulated shots in "+dir) {
		t.Errorf("said %q", out.String())
	}
	// Its own papers make the same night again.
	again := simulateCmd{
		Folder: dir + "2", Preset: "rubidium",
		Scenario: filepath.Join(dir, "simulated.toml"), Settings: filepath.Join(dir, "fallshadow.toml"),
	}
	if err := again.Run(context.Background(), &out); err != nil {
		t.Fatal(err)
	}
	if !strings.Contains(out.String(), ", drawn with the atom, trap and camera of "+again.Settings+"\n") {
		t.Errorf("said %q", out.String())
	}
	for _, name := range []string{"ramp_0001.fits", "truth.csv", "simulated.toml", "fallshadow.toml"} {
		a, err := os.ReadFile(filepath.Join(dir, name))
		if err != nil {
			t.Fatal(err)
		}
		b, err := os.ReadFile(filepath.Join(dir+"2", name))
		if err != nil || !bytes.Equal(a, b) {
			t.Errorf("%s differs: %v", name, err)
		}
	}
}

func TestSimulateCommandRefuses(t *testing.T) {
	cases := []struct {
		cmd  simulateCmd
		want string
	}{
		{simulateCmd{Preset: "demo"}, "name a new folder"},
		{simulateCmd{Preset: "demo", Folder: "."}, "not empty"},
		{simulateCmd{Preset: "demos", Folder: "x"}, "known are demo"},
		{simulateCmd{Preset: "demo", Folder: "x", Shots: -1}, "shots is -1"},
		{simulateCmd{Preset: "demo", Folder: "x", Scenario: "nowhere.toml"}, "nowhere.toml"},
		{simulateCmd{Preset: "demo", Folder: "x", Settings: "nowhere.toml"}, "nowhere.toml"},
	}
	for _, c := range cases {
		err := c.cmd.Run(context.Background(), &bytes.Buffer{})
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("want an error about %q, got %v", c.want, err)
		}
	}
}

func TestSimulateLists(t *testing.T) {
	var out bytes.Buffer
	if err := (&simulateCmd{List: true}).Run(context.Background(), &out); err != nil {
		t.Fatal(err)
	}
	for _, name := range []string{"demo", "rubidium", "threshold", "sodium-bright", "fringed", "faint", "potassium-flight", "mean-field", "wreck"} {
		if !strings.Contains(out.String(), "\n"+name+" ") && !strings.HasPrefix(out.String(), name+" ") {
			t.Errorf("%s is not listed:\n%s", name, out.String())
		}
	}
	t.Log("\n" + out.String())
}
