package settings

import (
	"image"
	"regexp"
	"strings"

	"fallshadow/fit"
	"fallshadow/imageio"
	"fallshadow/imageio/light"
)

// Layout returns what makes a shot, for imageio.
func (s *Settings) Layout() imageio.Layout {
	l := imageio.Layout{
		Kind:        s.Shots.Layout,
		Pattern:     s.Shots.Pattern,
		DarkPattern: filesPattern(s.Shots.DarkFiles),
		Sidecar:     s.Shots.SideTable,
		SidecarKey:  s.Shots.SideKey,
	}
	for i, name := range s.Shots.Planes {
		role, _ := imageio.ParseRole(name) // one of the key's words
		l.Planes = append(l.Planes, role)
		if i < len(s.Shots.Suffixes) {
			if l.Suffix == nil {
				l.Suffix = map[imageio.Role]string{}
			}
			l.Suffix[role] = s.Shots.Suffixes[i]
		}
	}
	return l
}

// filesPattern turns names with * and ? into one regular expression over paths.
func filesPattern(files []string) string {
	if len(files) == 0 {
		return ""
	}
	alternatives := make([]string, len(files))
	for i, f := range files {
		alternatives[i] = strings.NewReplacer(`\*`, `[^/]*`, `\?`, `[^/]`).Replace(regexp.QuoteMeta(f))
	}
	return "^(?:" + strings.Join(alternatives, "|") + ")$"
}

// LightCamera returns the camera for imageio/light, 0 for what is to be measured.
func (s *Settings) LightCamera() light.Camera {
	c := s.Camera
	r := s.Region
	return light.Camera{
		ElectronsPerCount: c.ElectronsPerCount.Value,
		ReadNoise:         c.ReadNoise.Value,
		FullScale:         c.FullScale.Value,
		BadPixels:         c.BadPixels,
		Bin:               s.Fit.Rebin,
		Region:            image.Rect(r.X, r.Y, r.X+r.Width, r.Y+r.Height),
	}
}

// WithCamera returns the settings with gain and read noise of a camera in which imageio
// filled in what was measured.
func (s *Settings) WithCamera(c light.Camera) *Settings {
	filled := *s
	filled.measured = filled.measured || !s.Camera.ElectronsPerCount.Given
	filled.Camera.ElectronsPerCount = Number{c.ElectronsPerCount, true}
	filled.Camera.ReadNoise = Number{c.ReadNoise, true}
	return &filled
}

// Options returns what the user chose of the fit.
func (s *Settings) Options() fit.Options {
	return fit.Options{
		Gaussian:       s.Fit.Thermal == "gauss",
		MeanField:      s.Fit.Thermal == "semi-ideal",
		Free:           s.Fit.Tie == "free",
		FreeAngle:      s.Fit.Angle == "free",
		Fugacity:       map[string]fit.Fugacity{"free": fit.FugacityFree, "number": fit.FugacityNumber}[s.Fit.Fugacity],
		ScaleErrors:    s.Fit.Errors == "scaled",
		CondensateChi2: s.Fit.CondensateChi2.Value,
	}
}
