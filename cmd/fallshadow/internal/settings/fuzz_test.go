package settings

import (
	"bytes"
	"errors"
	"strings"
	"testing"

	"fallshadow/imageio"
)

// FuzzParse: whatever the file, Parse returns settings that can be written out and read
// back, or problems that stand within the file and speak no Go.
func FuzzParse(f *testing.F) {
	f.Add(Template())
	f.Add([]byte(evap))
	f.Add([]byte(defaultText()))
	for _, w := range wrongs {
		f.Add([]byte(w.text()))
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		s, err := Parse(data, "s")
		if err != nil {
			fuzzProblems(t, data, err)
			return
		}
		again, err := Parse([]byte(s.Text()), "again")
		if err != nil || again.Digest() != s.Digest() {
			t.Fatalf("written out and read back: %v\n%s", err, s.Text())
		}
		if _, err := s.Lab(); err != nil && s.Camera.ElectronsPerCount.Given {
			t.Fatal(err)
		}
		s.Warnings()
		s.Layout()
		s.Scan(imageio.Metadata{"TOF": "15"})
	})
}

func fuzzProblems(t *testing.T, data []byte, err error) {
	var problems Problems
	if !errors.As(err, &problems) || len(problems) == 0 {
		t.Fatalf("an error that is no list of problems: %v", err)
	}
	lines := bytes.Split(data, []byte("\n"))
	for i, p := range problems {
		if p.Line < 1 || p.Line > len(lines) || p.Column < 1 || p.Column > len(lines[p.Line-1])+1 {
			t.Fatalf("%v stands outside the file", p)
		}
		if i > 0 && problems[i-1].Line > p.Line {
			t.Fatalf("%v stands before %v", problems[i-1], p)
		}
		if strings.TrimSpace(p.Text) == "" || strings.ContainsAny(p.Text, "\n\r") {
			t.Fatalf("problem %q", p.Text)
		}
	}
}
