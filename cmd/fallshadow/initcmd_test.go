package main

import (
	"bytes"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"fallshadow/cmd/fallshadow/internal/settings"
)

func TestInitPrints(t *testing.T) {
	var out bytes.Buffer
	if err := (&initCmd{}).Run(&out); err != nil {
		t.Fatal(err)
	}
	if _, err := settings.Parse(out.Bytes(), "printed"); err != nil {
		t.Errorf("what init prints does not work: %v", err)
	}
	out.Reset()
	if err := (&initCmd{Keys: true}).Run(&out); err != nil || !strings.Contains(out.String(), "| `trap.axis1_hz` | Hz") {
		t.Errorf("keys: %v\n%s", err, out.String())
	}
}

func TestInitWritesOnce(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, settings.FileName)
	c := &initCmd{Write: path}
	var out bytes.Buffer
	if err := c.Run(&out); err != nil || !strings.Contains(out.String(), path) {
		t.Fatalf("%v, %q", err, out.String())
	}
	if _, err := settings.Load(path); err != nil {
		t.Error(err)
	}
	if err := os.WriteFile(path, []byte("mine"), 0o644); err != nil {
		t.Fatal(err)
	}
	if err := c.Run(&out); err == nil || !strings.Contains(err.Error(), "not written over") {
		t.Errorf("second time: %v", err)
	}
	if got, err := os.ReadFile(path); err != nil || string(got) != "mine" {
		t.Errorf("the file now holds %q, %v", got, err)
	}
	if err := (&initCmd{Write: filepath.Join(dir, "none", "x.toml")}).Run(&out); err == nil || !strings.Contains(err.Error(), "there is no folder "+filepath.Join(dir, "none")+": make it first, or name a file in one that is there") {
		t.Errorf("in a folder that is not there: %v", err)
	}
	if entries, err := os.ReadDir(dir); err != nil || len(entries) != 1 {
		t.Errorf("left behind: %v, %v", entries, err)
	}
}
