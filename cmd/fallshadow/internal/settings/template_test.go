package settings

import (
	"strings"
	"testing"
)

func TestTemplateWorks(t *testing.T) {
	s := parse(t, string(Template()))
	if w := s.Warnings(); len(w) > 0 {
		t.Errorf("the template is warned of: %q", w)
	}
	if s.Trap.Axis1Hz != (Quantity{20, 0.1, true, true}) {
		t.Errorf("axis1_hz is %+v", s.Trap.Axis1Hz)
	}
	for _, line := range strings.Split(string(Template()), "\n") {
		if len(line) > 88 {
			t.Errorf("%d characters: %s", len(line), line)
		}
	}
}

// TestTemplateTellsDefaults uncomments every key that has a default: nothing changes.
func TestTemplateTellsDefaults(t *testing.T) {
	text := string(Template())
	n := 0
	for _, k := range keys {
		if k.def != "" && !k.shown {
			before := text
			text = strings.Replace(text, "\n#"+k.name+" = "+k.def+"\n", "\n"+k.name+" = "+k.def+"\n", 1)
			if text == before {
				t.Errorf("the template does not tell %s", k.full())
			}
			n++
		}
	}
	if parse(t, text).Text() != parse(t, string(Template())).Text() || n < 10 {
		t.Error("spelling out the defaults changes the settings")
	}
}

func TestTemplateAndTableHoldEveryKey(t *testing.T) {
	for i := range keys {
		k := &keys[i]
		if !strings.Contains(string(Template()), k.templateLine()) {
			t.Errorf("%s is not in the template", k.full())
		}
		if !strings.Contains(string(Markdown()), "| `"+k.full()+"` |") {
			t.Errorf("%s is not in the table", k.full())
		}
	}
	for _, row := range strings.Split(strings.TrimSpace(string(Markdown())), "\n") {
		if n := strings.Count(strings.ReplaceAll(row, `\|`, ""), "|"); n != 7 {
			t.Errorf("%d bars in %s", n, row)
		}
	}
}
