package model

import (
	"math"
	"testing"
)

// TestViewIsRotation: orthogonal with determinant 1 for arbitrary angles.
func TestViewIsRotation(t *testing.T) {
	for _, a := range [][3]float64{{0, 0, 0}, {0.3, 0, 2}, {0.07, 1.1, -0.4}, {-2, 3, 1}} {
		r := View(a[0], a[1], a[2])
		for i := range 3 {
			for j := range 3 {
				dot, want := 0.0, 0.0
				for k := range 3 {
					dot += r[i][k] * r[j][k]
				}
				if i == j {
					want = 1
				}
				within(t, "orthogonality", dot, want, 1e-15)
			}
		}
		det := 0.0
		for k := range 3 {
			det += r[0][k] * (r[1][(k+1)%3]*r[2][(k+2)%3] - r[1][(k+2)%3]*r[2][(k+1)%3])
		}
		within(t, "determinant", det, 1, 1e-15)
	}
}

// TestViewConventions: angle turns axis 1 from +x towards +y (down the screen); a tilt
// about axis 1 mixes axes 2 and 3, about axis 2 mixes 1 and 3, and leaves its own axis.
func TestViewConventions(t *testing.T) {
	d := [3]float64{4, 9, 25}
	equal := func(what string, got, want Shape) {
		t.Helper()
		within(t, what+" XX", got.XX, want.XX, 1e-13)
		within(t, what+" XY", got.XY, want.XY, 1e-13)
		within(t, what+" YY", got.YY, want.YY, 1e-13)
	}
	r := View(0.2, 0, 0)
	within(t, "axis 1 along x", r[0][0], math.Cos(0.2), 1e-15)
	within(t, "axis 1 along y", r[1][0], math.Sin(0.2), 1e-15)
	equal("turned", r.Project(d), Shape{4, 0, 9}.Turn(0.2))
	c, s := math.Cos(0.3), math.Sin(0.3)
	equal("about axis 1", View(0, 0.3, 0).Project(d), Shape{4, 0, 9*c*c + 25*s*s})
	equal("about axis 2", View(0, 0.3, math.Pi/2).Project(d), Shape{4*c*c + 25*s*s, 0, 9})
	equal("face to the side", View(0, math.Pi/2, math.Pi/2).Project(d), Shape{25, 0, 9})
}

// TestProjectIsShadow integrates a tilted gaussian along the line of sight: the column is
// the gaussian of the projected shape.
func TestProjectIsShadow(t *testing.T) {
	d, r := [3]float64{1, 0.3, 2.2}, View(0.4, 0.8, 1.1)
	s := r.Project(d)
	column := func(x, y float64) float64 {
		sum := 0.0
		for k := -400; k <= 400; k++ {
			z, q := float64(k)*0.025, 0.0
			for i := range 3 {
				u := r[0][i]*x + r[1][i]*y + r[2][i]*z
				q += u * u / d[i]
			}
			sum += math.Exp(-q/2) * 0.025
		}
		return sum
	}
	peak := column(0, 0)
	for _, p := range [][2]float64{{0.5, 0}, {-0.3, 0.9}, {1.5, 1.1}} {
		near(t, "column", column(p[0], p[1])/peak, math.Exp(-s.Quadratic(p[0], p[1])/2), 1e-12)
	}
	near(t, "peak", peak, math.Sqrt(2*math.Pi*d[0]*d[1]*d[2]/s.Det()), 1e-12)
}

func TestShape(t *testing.T) {
	s := Shape{XX: 3, XY: 0.7, YY: 1.2}
	i := s.Inverse()
	within(t, "inverse diagonal", s.XX*i.XX+s.XY*i.XY, 1, 1e-15)
	within(t, "inverse off diagonal", s.XX*i.XY+s.XY*i.YY, 0, 1e-15)
	within(t, "quadratic", s.Quadratic(0.4, -1.1), 0.16*i.XX-2*0.44*i.XY+1.21*i.YY, 1e-14)
	within(t, "turned there and back", s.Turn(0.7).Turn(-0.7).XY, s.XY, 1e-15)
	within(t, "determinant turned", s.Turn(1.3).Det(), s.Det(), 1e-14)
	within(t, "along", s.Along(0.3), s.Turn(-0.3).XX, 1e-15)
	within(t, "grown", s.Grow(2).Det(), (s.XX+2)*(s.YY+2)-s.XY*s.XY, 1e-14)
	within(t, "scaled", s.Scale(3).Det(), 9*s.Det(), 1e-13)
}

// TestPrincipal: names follow the given direction and not the size, whatever the order of
// the eigenvalues; a round shape keeps the direction.
func TestPrincipal(t *testing.T) {
	for _, axes := range [][2]float64{{9, 4}, {4, 9}, {1e-6, 1}} {
		for angle := -1.5; angle <= 1.5; angle += 0.1 {
			s := Shape{axes[0], 0, axes[1]}.Turn(angle)
			first, second, got := s.Principal(angle + 0.6)
			within(t, "first", first, axes[0], 1e-14*9)
			within(t, "second", second, axes[1], 1e-14*9)
			within(t, "angle", math.Remainder(got-angle, math.Pi), 0, 1e-12)
			if !(math.Abs(got) <= math.Pi/2) {
				t.Errorf("angle %g lies outside ±π/2", got)
			}
		}
	}
	if first, second, angle := (Shape{2, 0, 2}).Principal(0.3); first != 2 || second != 2 || angle != 0.3 {
		t.Errorf("round shape: %g %g %g", first, second, angle)
	}
}
