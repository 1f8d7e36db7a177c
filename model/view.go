package model

import "math"

// Rotation holds the trap axes as the camera sees them: row 0 is x (column index
// to the right), row 1 is y (row index downwards), row 2 the line of sight;
// columns are the trap axes 1, 2, 3. It is orthogonal.
type Rotation [3][3]float64

// View returns the orientation of the trap in the camera's frame. The trap starts
// with axis 1 along x, axis 2 along y, axis 3 along the line of sight. It is first
// tilted by tilt about the direction in the 1-2 plane that makes the angle about
// with axis 1, then turned by angle about the line of sight, from +x towards +y
// (clockwise on the screen, y down). All angles in rad; every orientation can be
// reached.
func View(angle, tilt, about float64) Rotation {
	u := [3]float64{math.Cos(about), math.Sin(about), 0}
	c, s := math.Cos(tilt), math.Sin(tilt)
	cross := [3][3]float64{{0, 0, u[1]}, {0, 0, -u[0]}, {-u[1], u[0], 0}}
	ca, sa := math.Cos(angle), math.Sin(angle)
	turn := Rotation{{ca, -sa, 0}, {sa, ca, 0}, {0, 0, 1}}
	var lean Rotation
	for i := range 3 {
		for j := range 3 {
			lean[i][j] = (1-c)*u[i]*u[j] + s*cross[i][j]
			if i == j {
				lean[i][j] += c
			}
		}
	}
	return turn.times(lean)
}

func (r Rotation) times(q Rotation) Rotation {
	var p Rotation
	for i := range 3 {
		for j := range 3 {
			for k := range 3 {
				p[i][j] += r[i][k] * q[k][j]
			}
		}
	}
	return p
}

// Project returns the 2×2 shape matrix in the picture of an ellipsoid whose squared
// half-axes (or variances) along the trap axes are d: the x-y block of R diag(d) Rᵀ.
// This holds for the shadow of a Thomas-Fermi ellipsoid and for the marginal of a
// gaussian or Bose distribution alike. The unit is that of d.
func (r Rotation) Project(d [3]float64) Shape {
	var s Shape
	for k := range 3 {
		s.XX += r[0][k] * r[0][k] * d[k]
		s.XY += r[0][k] * r[1][k] * d[k]
		s.YY += r[1][k] * r[1][k] * d[k]
	}
	return s
}

// Shape is a symmetric positive 2×2 matrix in the picture: variances of a thermal
// cloud, squared radii of a condensate. Contours are r ᵀ S⁻¹ r = const.
type Shape struct{ XX, XY, YY float64 }

// Det returns the determinant.
func (s Shape) Det() float64 { return s.XX*s.YY - s.XY*s.XY }

// Scale returns the shape with every element multiplied by f.
func (s Shape) Scale(f float64) Shape { return Shape{s.XX * f, s.XY * f, s.YY * f} }

// Grow returns the shape with v added to both variances: a round blur.
func (s Shape) Grow(v float64) Shape { return Shape{s.XX + v, s.XY, s.YY + v} }

// Inverse returns the inverse matrix; a singular shape gives infinities or NaN.
func (s Shape) Inverse() Shape {
	d := s.Det()
	return Shape{s.YY / d, -s.XY / d, s.XX / d}
}

// Turn returns the shape turned by angle (rad) from +x towards +y.
func (s Shape) Turn(angle float64) Shape {
	c, n := math.Cos(angle), math.Sin(angle)
	return Shape{
		XX: c*c*s.XX - 2*c*n*s.XY + n*n*s.YY,
		XY: c*n*(s.XX-s.YY) + (c*c-n*n)*s.XY,
		YY: n*n*s.XX + 2*c*n*s.XY + c*c*s.YY,
	}
}

// Along returns eᵀ S e for the unit vector e at the given angle (rad) from +x.
func (s Shape) Along(angle float64) float64 {
	c, n := math.Cos(angle), math.Sin(angle)
	return c*c*s.XX + 2*c*n*s.XY + n*n*s.YY
}

// Principal returns the eigenvalues and the angle (rad, within ±π/2) of the first
// principal axis from +x, the axis being the one nearest to the given direction, so
// that names follow the trap and not the size. Round shapes return that direction.
func (s Shape) Principal(near float64) (first, second, angle float64) {
	half, diff := (s.XX+s.YY)/2, (s.XX-s.YY)/2
	r := math.Hypot(diff, s.XY)
	if r <= 1e-12*math.Abs(half) {
		return half, half, near
	}
	angle = math.Atan2(s.XY, diff) / 2
	first, second = half+r, half-r
	if d := math.Remainder(angle-near, math.Pi); math.Abs(d) > math.Pi/4 {
		angle += math.Pi / 2
		first, second = second, first
	}
	return first, second, math.Remainder(angle, math.Pi)
}

// Quadratic returns rᵀ S⁻¹ r at r = (x, y), which is 1 on the contour of S; not finite
// for a singular shape.
func (s Shape) Quadratic(x, y float64) float64 {
	return (s.YY*x*x - 2*s.XY*x*y + s.XX*y*y) / s.Det()
}
