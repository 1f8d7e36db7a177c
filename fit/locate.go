package fit

import (
	"context"
	"image"
	"math"
)

// Place says where the atoms of a picture are, as far as a fit at half its resolution knows;
// pixels in the order of the picture. It serves to compare light where there are none.
type Place struct {
	Mask         []bool    // true where atoms may be: within 2.5 widths or 1.2 radii
	Transmission []float64 // the fitted atoms frame over the scaled reference; nil where no cloud was found

	// Rough says that what was found does not fit: fringes or worse stand in the picture. The mask
	// is then a first guess, and another look with a better reference is worth its time.
	Rough bool

	// Window is the part of the picture that tells the cloud as well as all of it does: the whole
	// but for a small cloud in a large picture.
	Window image.Rectangle

	found *candidates // where the next fit of the same picture may begin
	whole image.Rectangle
}

// roughChi2 is χ² a bin beyond which a fit is rough.
const roughChi2 = 1.3

// Locate finds the cloud in a picture like Cloud does, but stops before the full picture, errors
// and comparisons. It fails like Cloud.
func Locate(ctx context.Context, pic *Picture, lab *Lab, flight float64, opt Options, ws *Workspace) (*Place, error) {
	s, err := newSession(ctx, pic, lab, flight, opt, ws)
	if err != nil {
		return nil, err
	}
	c, err := s.explore()
	if err != nil {
		return nil, err
	}
	place := &Place{Mask: make([]bool, pic.Width*pic.Height), Window: pic.bounds(), found: c, whole: pic.bounds()}
	l := s.levels[s.work]
	place.Rough = c.best().chi2 > roughChi2*float64(l.w*l.h)
	st, model := s.choose(c)
	if model == ModelNone {
		return place, nil
	}
	if !st.used() {
		return nil, stateError("the search for the cloud found no minimum", st)
	}
	s.fillMask(st, place.Mask)
	if pic.Width*pic.Height > Large {
		place.Window = s.around(st)
	}
	p := s.problem(0, &st.p, st.kind)
	place.Transmission = make([]float64, len(place.Mask))
	p.render(&st.p, place.Transmission, place.Transmission)
	if p.level.linear {
		place.Transmission = nil
		return place, nil
	}
	geo := p.geometry(&st.p, 0)
	step := math.Exp(-geo.light[1] * geo.iw)
	for j := range pic.Height {
		k := math.Exp(-geo.plane(0, float64(j)))
		row := place.Transmission[j*pic.Width : (j+1)*pic.Width]
		for i := range row {
			row[i] *= k
			k *= step
		}
	}
	return place, nil
}

func (s *session) fillMask(st *state, mask []bool) {
	most := 1.44
	if s.tmpl.gaussian {
		most = 10
	}
	// A thermal part of any size hides behind its noise somewhere; no more than four fifths of
	// the picture is masked by it, or there would be no light left to compare.
	reach := 6.25
	e := s.tmpl.thermalOf(&st.p)
	if area := math.Pi * math.Sqrt(e.square[0]*e.square[1]); reach*area > 0.8*float64(len(mask)) {
		reach = 0.8 * float64(len(mask)) / area
	}
	under, w := s.cover(st, reach, most), s.pic.Width
	for j := range s.pic.Height {
		under.row(float64(j), w, func(a, b int) {
			for o := j*w + a; o < j*w+b; o++ {
				mask[o] = true
			}
		})
	}
}
