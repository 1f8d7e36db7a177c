package fit

// Options are the choices of a fit. The zero value is the default: a Bose-enhanced thermal
// part, all widths tied to one T and one μ, the angle that the settings give.
type Options struct {
	Gaussian  bool // thermal part a plain gaussian instead of the Bose-enhanced form
	MeanField bool // thermal part beside a condensate semi-ideal: in the trap it felt the condensate
	Free      bool // report the fit in which every width is its own parameter
	FreeAngle bool // turn both parts to the best angle
	Maps      bool // draw Result.Maps
	Fugacity  Fugacity

	// ScaleErrors multiplies statistical errors by the root of χ² a pixel: for noise that is known
	// only up to a factor.
	ScaleErrors bool

	// Near, where not nil, is what Locate found in the same atoms frame under the same settings,
	// perhaps with a poorer reference: the search begins there and not with a first look, unless
	// that was rough.
	Near *Place

	// CondensateChi2 and ThermalChi2 are the decrease of χ² that a second part must bring
	// to be believed; CloudChi2 the one that any cloud must bring. 0 means the defaults.
	CondensateChi2, ThermalChi2, CloudChi2 float64

	searchFree bool // explore with free widths
}

// Fugacity says what holds the fugacity of the thermal part.
type Fugacity int

const (
	FugacityModel  Fugacity = iota // 1 beside a condensate, fitted without one
	FugacityFree                   // fitted in both cases
	FugacityNumber                 // the thermal number follows from T: g3(z)(kT/ħω̄)³, z = 1 beside a condensate
)

// The decreases of χ² asked for by default. A condensate beside a thermal part brings two
// numbers (N0 and μ) and can sit on any size, so the threshold is above that of two degrees
// of freedom at the same rate (15 would be 1 in 1800); any cloud brings at least four.
const (
	defaultCondensateChi2 = 18
	defaultThermalChi2    = 12
	defaultCloudChi2      = 30
)

func (o Options) filled() Options {
	for _, d := range []struct {
		p *float64
		v float64
	}{{&o.CondensateChi2, defaultCondensateChi2}, {&o.ThermalChi2, defaultThermalChi2}, {&o.CloudChi2, defaultCloudChi2}} {
		if *d.p == 0 {
			*d.p = d.v
		}
	}
	return o
}

// gaussianAlpha is a −ln z at which the Bose-enhanced form is a gaussian to 1e-10.
const gaussianAlpha = 20

// The kinds of fit that a picture is offered.
func (s *session) thermal() kind {
	return kind{thermal: true, alpha: !s.opt.Gaussian, angle: s.opt.FreeAngle, free: s.opt.searchFree}
}

func (s *session) alone() kind {
	return kind{condensate: true, angle: s.opt.FreeAngle, free: s.opt.searchFree, fixRadius: s.tmpl.gaussian && !s.opt.searchFree}
}

func (s *session) both() kind {
	k := s.alone()
	k.thermal = true
	k.alpha = s.opt.Fugacity == FugacityFree && !s.opt.Gaussian
	return k
}

// form names the profiles of a kind of fit.
func (s *session) form(k kind) string {
	thermal, condensate := "bose", "tf"
	switch {
	case s.opt.Gaussian:
		thermal = "gauss"
	case k.alpha:
		thermal = "bose-z"
	case s.opt.MeanField && k.condensate && !s.tmpl.gaussian:
		thermal = "semi-ideal"
	}
	if s.tmpl.gaussian {
		condensate = "gauss"
	}
	form := ""
	switch {
	case k.thermal && k.condensate:
		form = thermal + "+" + condensate
	case k.thermal:
		form = thermal
	case k.condensate:
		form = condensate
	default:
		return ""
	}
	if s.opt.Fugacity == FugacityNumber && k.thermal {
		form += ",number"
	}
	if s.opt.Free {
		form += ",free"
	}
	return form
}
