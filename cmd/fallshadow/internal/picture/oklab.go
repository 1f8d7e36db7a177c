package picture

import (
	"image/color"
	"math"
)

// lab is a colour in OKLab: lightness 0 to 1, and two axes on which equal distances look
// about alike.
type lab struct{ l, a, b float64 }

// polar returns the colour of a lightness, chroma and hue in degrees.
func polar(l, chroma, hue float64) lab {
	s, c := math.Sincos(hue * math.Pi / 180)
	return lab{l, chroma * c, chroma * s}
}

func (p lab) distance(q lab) float64 {
	return math.Sqrt((p.l-q.l)*(p.l-q.l) + (p.a-q.a)*(p.a-q.a) + (p.b-q.b)*(p.b-q.b))
}

func (p lab) mix(q lab, f float64) lab {
	return lab{p.l + f*(q.l-p.l), p.a + f*(q.a-p.a), p.b + f*(q.b-p.b)}
}

// linear returns red, green and blue in linear sRGB by the matrices of B. Ottosson, "A
// perceptual color space for image processing" (2020); outside 0 to 1 where no screen
// shows the colour.
func (p lab) linear() [3]float64 {
	l := cube(p.l + 0.3963377774*p.a + 0.2158037573*p.b)
	m := cube(p.l - 0.1055613458*p.a - 0.0638541728*p.b)
	s := cube(p.l - 0.0894841775*p.a - 1.2914855480*p.b)
	return [3]float64{
		+4.0767416621*l - 3.3077115913*m + 0.2309699292*s,
		-1.2684380046*l + 2.6097574011*m - 0.3413193965*s,
		-0.0041960863*l - 0.7034186147*m + 1.7076147010*s,
	}
}

func cube(x float64) float64 { return x * x * x }

// shown reports whether a screen can show the colour.
func (p lab) shown() bool {
	for _, v := range p.linear() {
		if v < -1e-4 || v > 1+1e-4 {
			return false
		}
	}
	return true
}

// muted returns the colour, or the one of the same lightness and hue with the most chroma
// that a screen can show.
func (p lab) muted() lab {
	if p.shown() {
		return p
	}
	low, high := 0.0, 1.0
	for range 30 {
		f := (low + high) / 2
		if (lab{p.l, f * p.a, f * p.b}).shown() {
			low = f
		} else {
			high = f
		}
	}
	return lab{p.l, low * p.a, low * p.b}
}

// rgba returns the colour as a screen takes it (IEC 61966-2-1).
func (p lab) rgba() color.RGBA {
	v := p.linear()
	return color.RGBA{gamma(v[0]), gamma(v[1]), gamma(v[2]), 255}
}

func gamma(v float64) uint8 {
	v = math.Min(math.Max(v, 0), 1)
	if v <= 0.0031308 {
		v *= 12.92
	} else {
		v = 1.055*math.Pow(v, 1/2.4) - 0.055
	}
	return uint8(math.Round(255 * v))
}
