package check

import "strings"

// writeSettings tells what the settings leave open.
func (v *visit) writeSettings() {
	if names := v.Settings.Unstated(); len(names) > 0 {
		v.page.title("Settings")
		v.page.pair("no uncertainty", "%s: cells ending in _cal that need one stay empty", strings.Join(names, ", "))
	}
}

// judgeSettings notes settings that look like slips.
func (v *visit) judgeSettings() {
	for _, w := range v.look.Settings.Warnings() {
		if strings.HasPrefix(w, "counts_per_isat means") {
			continue // writeEfficiency tells more
		}
		v.trouble.caution("", "%s", w)
	}
}
