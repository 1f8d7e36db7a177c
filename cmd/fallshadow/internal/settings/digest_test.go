package settings

import (
	"encoding/hex"
	"strings"
	"testing"
)

// other is, for every key, a value that is neither its default nor that of base.
var other = map[string]string{
	"atom.species": `"23Na"`, "trap.sight_hz": "120.0", "atom.state": `"|2,2>"`, "atom.scattering_length_a0": "95.0", "atom.mass_u": "80",
	"atom.wavelength_nm": "795", "atom.linewidth_MHz": "5.75", "trap.release": `"linear"`, "camera.pixel_um": "{ value = 6.45, err = 0.01 }",
	"probe.detuning_gamma": "0.5", "probe.stray_fraction": "0.01", "flight.unit": `"us"`, "flight.from": `"tof"`,
	"trap.tilt_deg": "10", "trap.tilt_about_deg": "90", "trap.release_ms": "0.5", "camera.binning": "2", "camera.electrons_per_count": "2",
	"shots.layout": `"extensions"`, "shots.planes": `["light", "atoms", "dark"]`,
	"fit.thermal": `"gauss"`, "fit.tie": `"free"`, "fit.angle": `"free"`, "fit.fugacity": `"number"`, "fit.errors": `"scaled"`, "fit.rebin": "2", "fit.reference": `"own"`, "fit.basis_size": "30",
}

// TestDigestSeesWhatChangesNumbers sets every key in turn.
func TestDigestSeesWhatChangesNumbers(t *testing.T) {
	for i := range keys {
		k := &keys[i]
		value := k.sample
		if v, ok := other[k.full()]; ok {
			value = v
		}
		text := withKey(t, k.full(), value)
		text = strings.Replace(text, `release = "linear"`+"\n[", `release = "linear"`+"\nrelease_ms = 0.5\n[", 1)
		if k.full() == "trap.release" {
			text = strings.Replace(text, "[trap]\n", "[trap]\nrelease_ms = 0.5\n", 1)
		}
		changed := parse(t, text).Digest() != parse(t, base).Digest()
		numbers := !k.silent || k.full() == "atom.species" || k.full() == "atom.state" // by the numbers they stand for
		if changed != numbers {
			t.Errorf("%s = %s: digest changed is %v, numbers change is %v", k.full(), value, changed, numbers)
		}
	}
}

func TestDigestSeesUncertainties(t *testing.T) {
	seen := map[[32]byte]string{}
	for _, v := range []string{"20.0", "{ value = 20.0, err = 0 }", "{ value = 20.0, err = 0.1 }"} {
		d := parse(t, with(t, "trap.axis1_hz", v)).Digest()
		if before, ok := seen[d]; ok {
			t.Errorf("%s and %s have the same digest", before, v)
		}
		seen[d] = v
	}
}

// TestDigestStays pins the digest of base: a change makes every ledger be fitted again,
// and is right only together with one of what settings mean.
func TestDigestStays(t *testing.T) {
	d := parse(t, base).Digest()
	golden(t, "digested.golden", parse(t, base).digested()+hex.EncodeToString(d[:])+"\n")
}

// TestTextReadsBack: effective settings written out mean the same, and say the same again.
func TestTextReadsBack(t *testing.T) {
	for i := range keys {
		k := &keys[i]
		value := k.sample
		if value == "" || k.full() == "trap.release" {
			continue
		}
		s := parse(t, withKey(t, k.full(), value))
		again := parse(t, s.Text())
		if again.Text() != s.Text() || again.Digest() != s.Digest() {
			t.Errorf("%s: written\n%s\nread back\n%s", k.full(), s.Text(), again.Text())
		}
	}
}
