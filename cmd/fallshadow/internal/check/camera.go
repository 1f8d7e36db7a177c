package check

import (
	"context"
	"fmt"
	"math"
	"slices"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/imageio/light"
)

// The shots that the camera is measured from at most, and the parts by which the settings
// may lie beside what is measured; a gain also by five standard errors.
const (
	transferShots = 20
	gainOff       = 0.05
	noiseOff      = 0.2
)

// transfer is the measurement of the camera, or why there is none.
type transfer struct {
	*light.Transfer
	err error
}

// measureCamera measures the camera from the first shots of a night where the night did
// not need to be measured as a whole.
func (v *visit) measureCamera(ctx context.Context) {
	if v.camera.Transfer = v.look.Light.Transfer; v.camera.Transfer == nil {
		v.camera.Transfer, v.camera.err = light.PhotonTransfer(ctx, v.look.Light.Camera, v.look.Frames(ctx, transferShots))
	}
}

// writeCamera tells what is known and measured of the camera.
func (v *visit) writeCamera() {
	n := v.look.Light
	v.page.title("Camera")
	if raw := slices.ContainsFunc(v.shots, func(s shot) bool { return s.raw }); !raw {
		v.page.pair("frames", "none: density images say nothing of saturated or black pixels, and their noise is estimated")
		return
	}
	trusted := v.writeGain()
	v.writeNoise(trusted)
	if n.Darks > 0 {
		v.page.pair("darks", "%d in the master dark; level %s counts, %s rms over the night", n.Darks, digits(n.Offset, 4), digits(n.OffsetSpread, 2))
	} else {
		v.page.pair("darks", "none usable")
	}
	v.page.pair("bad pixels", "%d hot, restless or listed; %d are listed in the settings", n.BadPixels(), len(v.Settings.Camera.BadPixels))
	if size := v.commonSize(); v.Settings.Misplaced(size.X, size.Y) != "" {
		v.trouble.caution("", "%s", v.Settings.Misplaced(size.X, size.Y))
	}
	v.writePeaks()
}

// writeGain tells of the gain, and reports whether it can be trusted.
func (v *visit) writeGain() (trusted bool) {
	given, t, err := v.Settings.Camera.ElectronsPerCount, v.camera.Transfer, v.camera.err
	switch {
	case given.Given && err != nil:
		v.page.pair("gain", "%g electrons a count, from the settings; it could not be measured: %v", given.Value, err)
	case given.Given:
		v.page.pair("gain", "%g electrons a count, from the settings; %s measured from %s", given.Value,
			withError(t.ElectronsPerCount, t.ElectronsPerCountErr), plural(t.Pairs, "pair"))
		if math.Abs(given.Value-t.ElectronsPerCount) > max(gainOff*t.ElectronsPerCount, 5*t.ElectronsPerCountErr) {
			v.trouble.problem("", "electrons_per_count = %g, but light and dark frames give %s: the stated noise is wrong; was counts per electron entered, or another gain?",
				given.Value, withError(t.ElectronsPerCount, t.ElectronsPerCountErr))
			return false
		}
	default:
		v.page.pair("gain", "%s electrons a count, measured from %s", withError(t.ElectronsPerCount, t.ElectronsPerCountErr), plural(t.Pairs, "pair"))
	}
	return true
}

func (v *visit) writeNoise(trusted bool) {
	n, given := v.look.Light, v.Settings.Camera.ReadNoise
	if !given.Given {
		v.page.pair("read noise", "%.3g electrons rms, measured from the darks", n.Camera.ReadNoise)
		return
	}
	if n.Darks < 2 {
		v.page.pair("read noise", "%g electrons rms, from the settings; too few darks to measure it", given.Value)
		return
	}
	v.page.pair("read noise", "%g electrons rms, from the settings; the darks have %.3g", given.Value, n.DarkNoise)
	if trusted && math.Abs(given.Value-n.DarkNoise) > noiseOff*n.DarkNoise {
		v.trouble.caution("", "read_noise_electrons = %g, but the darks have %.3g electrons: check it", given.Value, n.DarkNoise)
	}
}

// The part of full scale above which cameras cease to be linear (common practice).
const nearFull = 0.9

// writePeaks holds the highest counts of the night against full scale.
func (v *visit) writePeaks() {
	var most [2]peak
	list := v.usable()
	if len(list) == 0 {
		for i := range v.shots {
			list = append(list, i)
		}
	}
	for _, i := range list {
		for k, p := range v.shots[i].peaks {
			most[k].common, most[k].highest = max(most[k].common, p.common), max(most[k].highest, p.highest)
		}
	}
	text := fmt.Sprintf("light %.0f, atoms %.0f counts (a thousandth of the pixels are above)", most[1].common, most[0].common)
	full := v.Settings.Camera.FullScale
	if !full.Given {
		v.page.pair("peak counts", "%s; highest %.0f; full_scale_counts is not given", text, max(most[0].highest, most[1].highest))
		return
	}
	top := max(most[0].common, most[1].common)
	v.page.pair("peak counts", "%s: %.0f %% of full scale", text, 100*top/full.Value)
	switch highest := max(most[0].highest, most[1].highest); {
	case highest > full.Value:
		v.trouble.problem("", "frames hold up to %.0f counts, above full_scale_counts = %g: such pixels are taken as saturated; correct it", highest, full.Value)
	case top > nearFull*full.Value:
		v.trouble.caution("", "the brightest pixels reach %.0f %% of full scale, where cameras are not linear: lower probe, exposure or gain", 100*top/full.Value)
	}
}

// withError writes a number with its standard error as the table of results does.
func withError(x, err float64) string {
	var r ledger.Row
	r.SetNumber("x", x)
	r.SetNumber("x_err", err)
	return report.Concise(&r, "x")
}
