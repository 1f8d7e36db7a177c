package lm

import "math"

// nistModel is the response of one of the 27 problems at the predictors x with parameters
// b, filling d with its derivatives by them.
type nistModel func(b, x, d []float64) float64

// The models as the files of testdata/reference/nist-strd print them.
var nistModels = map[string]nistModel{
	"Bennett5": bennett, "BoxBOD": saturation, "Chwirut1": chwirut, "Chwirut2": chwirut,
	"DanWood": power, "ENSO": enso, "Eckerle4": eckerle, "Gauss1": gauss, "Gauss2": gauss,
	"Gauss3": gauss, "Hahn1": rational(4), "Kirby2": rational(3), "Lanczos1": lanczos,
	"Lanczos2": lanczos, "Lanczos3": lanczos, "MGH09": mgh09, "MGH10": mgh10, "MGH17": mgh17,
	"Misra1a": saturation, "Misra1b": misra1b, "Misra1c": misra1c, "Misra1d": misra1d,
	"Nelson": nelson, "Rat42": rat42, "Rat43": rat43, "Roszman1": roszman, "Thurber": rational(4),
}

func bennett(b, x, d []float64) float64 {
	l := math.Log(b[1] + x[0])
	p := math.Exp(-l / b[2])
	d[0], d[1], d[2] = p, -b[0]*p/(b[2]*(b[1]+x[0])), b[0]*p*l/(b[2]*b[2])
	return b[0] * p
}

func saturation(b, x, d []float64) float64 {
	d[0], d[1] = -math.Expm1(-b[1]*x[0]), b[0]*x[0]*math.Exp(-b[1]*x[0])
	return b[0] * d[0]
}

func chwirut(b, x, d []float64) float64 {
	q := 1 / (b[1] + b[2]*x[0])
	f := math.Exp(-b[0]*x[0]) * q
	d[0], d[1], d[2] = -x[0]*f, -f*q, -x[0]*f*q
	return f
}

func power(b, x, d []float64) float64 {
	d[0] = math.Pow(x[0], b[1])
	d[1] = b[0] * d[0] * math.Log(x[0])
	return b[0] * d[0]
}

func enso(b, x, d []float64) float64 {
	d[0] = 1
	d[2], d[1] = math.Sincos(2 * math.Pi * x[0] / 12)
	f := b[0] + b[1]*d[1] + b[2]*d[2]
	for _, k := range [2]int{3, 6} {
		phase := 2 * math.Pi * x[0] / b[k]
		s, c := math.Sincos(phase)
		f += b[k+1]*c + b[k+2]*s
		d[k], d[k+1], d[k+2] = (b[k+1]*s-b[k+2]*c)*phase/b[k], c, s
	}
	return f
}

func eckerle(b, x, d []float64) float64 {
	u := (x[0] - b[2]) / b[1]
	e := math.Exp(-0.5*u*u) / b[1]
	d[0], d[1], d[2] = e, b[0]*e*(u*u-1)/b[1], b[0]*e*u/b[1]
	return b[0] * e
}

func gauss(b, x, d []float64) float64 {
	d[0] = math.Exp(-b[1] * x[0])
	d[1] = -b[0] * x[0] * d[0]
	f := b[0] * d[0]
	for _, k := range [2]int{2, 5} {
		u := (x[0] - b[k+1]) / b[k+2]
		e := math.Exp(-u * u)
		f += b[k] * e
		d[k], d[k+1], d[k+2] = e, 2*b[k]*e*u/b[k+2], 2*b[k]*e*u*u/b[k+2]
	}
	return f
}

// rational is the quotient of two polynomials with n coefficients each, the first one of
// the denominator being 1.
func rational(n int) nistModel {
	return func(b, x, d []float64) float64 {
		num, den, p := 0.0, 1.0, 1.0
		for k := range n {
			num += b[k] * p
			if k > 0 {
				den += b[n+k-1] * p
			}
			p *= x[0]
		}
		p = 1
		for k := range n {
			d[k] = p / den
			if k > 0 {
				d[n+k-1] = -num * p / (den * den)
			}
			p *= x[0]
		}
		return num / den
	}
}

func lanczos(b, x, d []float64) float64 {
	f := 0.0
	for k := 0; k < 6; k += 2 {
		d[k] = math.Exp(-b[k+1] * x[0])
		d[k+1] = -b[k] * x[0] * d[k]
		f += b[k] * d[k]
	}
	return f
}

func mgh09(b, x, d []float64) float64 {
	num, q := x[0]*x[0]+x[0]*b[1], 1/(x[0]*x[0]+x[0]*b[2]+b[3])
	f := b[0] * num * q
	d[0], d[1], d[2], d[3] = num*q, b[0]*x[0]*q, -f*q*x[0], -f*q
	return f
}

func mgh10(b, x, d []float64) float64 {
	q := 1 / (x[0] + b[2])
	e := math.Exp(b[1] * q)
	d[0], d[1], d[2] = e, b[0]*e*q, -b[0]*e*b[1]*q*q
	return b[0] * e
}

func mgh17(b, x, d []float64) float64 {
	p, q := math.Exp(-x[0]*b[3]), math.Exp(-x[0]*b[4])
	d[0], d[1], d[2], d[3], d[4] = 1, p, q, -b[1]*x[0]*p, -b[2]*x[0]*q
	return b[0] + b[1]*p + b[2]*q
}

func misra1b(b, x, d []float64) float64 {
	u := 1 + b[1]*x[0]/2
	d[0], d[1] = 1-1/(u*u), b[0]*x[0]/(u*u*u)
	return b[0] * d[0]
}

func misra1c(b, x, d []float64) float64 {
	u := 1 + 2*b[1]*x[0]
	d[0], d[1] = 1-1/math.Sqrt(u), b[0]*x[0]/(u*math.Sqrt(u))
	return b[0] * d[0]
}

func misra1d(b, x, d []float64) float64 {
	u := 1 / (1 + b[1]*x[0])
	d[0], d[1] = b[1]*x[0]*u, b[0]*x[0]*u*u
	return b[0] * d[0]
}

// nelson is the logarithm of the response, which is what is fitted.
func nelson(b, x, d []float64) float64 {
	e := math.Exp(-b[2] * x[1])
	d[0], d[1], d[2] = 1, -x[0]*e, b[1]*x[0]*x[1]*e
	return b[0] - b[1]*x[0]*e
}

func rat42(b, x, d []float64) float64 {
	e := math.Exp(b[1] - b[2]*x[0])
	q := 1 / (1 + e)
	d[0], d[1], d[2] = q, -b[0]*e*q*q, b[0]*e*q*q*x[0]
	return b[0] * q
}

func rat43(b, x, d []float64) float64 {
	e := math.Exp(b[1] - b[2]*x[0])
	l := math.Log1p(e)
	p := math.Exp(-l / b[3])
	k := -b[0] * p * e / (b[3] * (1 + e))
	d[0], d[1], d[2], d[3] = p, k, -k*x[0], b[0]*p*l/(b[3]*b[3])
	return b[0] * p
}

func roszman(b, x, d []float64) float64 {
	u := x[0] - b[3]
	k := -1 / (math.Pi * (u*u + b[2]*b[2]))
	d[0], d[1], d[2], d[3] = 1, -x[0], k*u, k*b[2]
	return b[0] - b[1]*x[0] - math.Atan(b[2]/u)/math.Pi
}
