package fit

// Rational forms of the Bose functions for kernels that evaluate many pixels at once:
// g = g₂(e^−t) = Li₂(e^−t) and h = g₁(e^−t) = −ln(1−e^−t) = −dg/dt, t ≥ 0.
//
// Below boseSplit they follow Robinson's expansion (Phys. Rev. 83, 678 (1951)), with
// L = ln t and y = t²,
//
//	h = −L + t/2 + y·H(y)        g = ζ(2) + t(L−1) − y/4 + t·y·G(y),
//
// above it the power series in z = e^−t, h = z·H(z) and g = z·G(z). H and G are the
// polynomials through the Chebyshev nodes of the range, lowest coefficient first; the
// largest error is 8e-13 in g and 6e-12 in h. The logarithm is that of t = 2^k·m with
// √½ ≤ m < √2 by the series of 2 artanh s, s = (m−1)/(m+1), in s² with error 4e-14.
const boseSplit = 2

var (
	boseFarG  = [7]float64{1.0000000000023528, 0.24999999829954192, 0.11111131094683817, 0.06249124127921557, 0.040181268383832458, 0.025882302556635338, 0.029860129115649593}
	boseFarH  = [7]float64{1.000000000019764, 0.49999998570736059, 0.33333501232864798, 0.2499264986869785, 0.20151770467309979, 0.15086314104747525, 0.22095656245982565}
	boseNearG = [6]float64{0.013888888888787362, -6.9444442614632169e-05, 7.8734661077855346e-07, -1.1476424999065029e-08, 1.8693413859673566e-10, -2.7224498697075994e-12}
	boseNearH = [6]float64{-0.041666666665188062, 0.00034722219557394924, -5.5113856267843301e-06, 1.0325541489010238e-07, -2.0458850493361896e-09, 3.4239746454778341e-11}
	boseLog   = [5]float64{0.6666666666737513, 0.3999999879728085, 0.28571754545612893, 0.22191400302390896, 0.19362662659489716}
)
