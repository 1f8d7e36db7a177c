package simulate

import (
	"errors"
	"fmt"
	"regexp"
	"slices"
	"strings"
)

// keyword is what a FITS header can hold, in capitals; settings find it in whatever case.
var keyword = regexp.MustCompile(`^[A-Z0-9_-]{1,8}$`)

// readable says where the settings would not find in the night what is written there.
func (n *Night) readable() error {
	shots := &n.Settings.Shots
	if shots.SideTable != "" {
		return errors.New("simulate writes no side table, the flight stands in the headers; leave out shots.side_table and shots.side_key")
	}
	if slices.Contains(shots.Planes, "unused") {
		return errors.New("simulate writes no plane without a use; leave \"unused\" out of shots.planes")
	}
	names := slices.Concat([]string{n.Settings.Clock.From}, shots.Scan[:min(1, len(shots.Scan))])
	for _, name := range names {
		if name != "" && !keyword.MatchString(strings.ToUpper(name)) {
			return fmt.Errorf("simulate writes %q into FITS headers, whose names are 1 to 8 letters, digits, _ or -; name it so in flight.from or shots.scan", name)
		}
	}
	return n.matches(regexp.MustCompile(shots.Pattern))
}

// matches says where a shot would not be taken for one.
func (n *Night) matches(pattern *regexp.Regexp) error {
	paths, shots := []string{n.Scenario.shotName(0) + ".fits"}, &n.Settings.Shots
	if shots.Layout == "files" {
		paths = paths[:0]
		for _, suffix := range shots.Suffixes {
			paths = append(paths, framePath(n.Scenario.shotName(0), suffix))
		}
	}
	for _, path := range paths {
		if !pattern.MatchString(path) {
			return fmt.Errorf("shots.pattern does not match %s, as simulate names a frame; leave it out, the flight stands in the headers", path)
		}
	}
	return nil
}
