package model

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/integrate/quad"
	"gonum.org/v1/gonum/mat"
)

// GroundState is the condensate of the Gross-Pitaevskii equation in an isotropic trap, in
// units of ħω and of ā = √(ħ/mω); energies are per atom, the density is that of one atom.
type GroundState struct {
	G                               float64 // N a/ā
	Mu, Energy                      float64 // μ = Energy + Interaction
	Kinetic, Potential, Interaction float64 // 2 Kinetic − 2 Potential + 3 Interaction = 0
	Radius                          float64 // beyond which the density is taken as 0
	grid                            *chebyshev
	psi                             []float64
}

var errUnsettled = errors.New("the steps of Newton's method do not settle")

// SolveGroundState returns the ground state of
//
//	[−½∇² + r²/2 + 4πg |ψ|²] ψ = μ ψ,   ∫ |ψ|² d³r = 1,   g = N a/ā,
//
// by Chebyshev collocation and Newton's method, carried over in g from the ideal gas.
// The domain is −0.5749 ≤ g ≤ 1e5; ErrCollapse below −0.57497. Energies and densities
// have 9 digits, next to the collapse 8. Source of the equation:
// Dalfovo et al., Rev. Mod. Phys. 71, 463 (1999), Eq. (39).
func SolveGroundState(g float64) (*GroundState, error) {
	switch {
	case g < -0.57497:
		return nil, fmt.Errorf("ground state at N a/ā = %g: %w", g, ErrCollapse)
	case !(g <= 1e5):
		return nil, fmt.Errorf("ground state at N a/ā = %g: it must lie between -0.5749 and 1e5", g)
	}
	radius := math.Sqrt(3+math.Pow(15*math.Max(0, g), 0.4)) + 6.5
	s := &GroundState{Mu: 1.5, Radius: radius, grid: newChebyshev(max(100, int(7*radius)), radius)}
	for _, r := range s.grid.r {
		s.psi = append(s.psi, math.Exp(-r*r/2)/math.Pow(math.Pi, 0.75))
	}
	for s.G != g {
		next := nextCoupling(s.G, g)
		s.dilate(next)
		if err := s.refine(next); err != nil {
			return nil, err
		}
	}
	s.energies()
	return s, nil
}

// nextCoupling returns the next step from the ideal gas towards g: factors of 8 up, where
// the shape only dilates, short steps down towards the collapse.
func nextCoupling(from, to float64) float64 {
	if to < 0 {
		return math.Max(to, (from-0.575)/2-1e-3)
	}
	return math.Min(to, math.Max(0.5, 8*from))
}

// dilate stretches a repulsive condensate to the size that the next coupling gives it in
// Thomas-Fermi, by r → r f.
func (s *GroundState) dilate(next float64) {
	if s.G < 1 {
		return
	}
	f := math.Pow(next/s.G, 0.2)
	psi := make([]float64, len(s.psi))
	for j, r := range s.grid.r {
		psi[j] = s.grid.at(s.psi, r/f) / math.Pow(f, 1.5)
	}
	s.psi, s.Mu = psi, s.Mu*f*f
}

// refine solves for ψ and μ at the coupling g by Newton's method from what s holds.
func (s *GroundState) refine(g float64) error {
	s.G = g
	last := math.Inf(1)
	for range 40 {
		step, err := s.newton()
		switch {
		case err != nil:
			return fmt.Errorf("ground state at N a/ā = %g: %w", g, err)
		case step < 1e-9 && step >= last/2: // rounding is reached
			return nil
		}
		last = step
	}
	return fmt.Errorf("ground state at N a/ā = %g: %w", g, errUnsettled)
}

// newton makes one step and returns its size relative to ψ. ψ(R) = 0 stands in the first
// row, the norm in the last.
func (s *GroundState) newton() (float64, error) {
	n := len(s.psi)
	jacobian, rest := mat.NewDense(n+1, n+1, nil), mat.NewVecDense(n+1, nil)
	jacobian.Slice(0, n, 0, n).(*mat.Dense).Scale(-0.5, s.grid.laplas)
	norm := -1.
	for j, r := range s.grid.r {
		field := 4 * math.Pi * s.G * s.psi[j] * s.psi[j]
		kinetic := -0.5 * mat.Dot(s.grid.laplas.RowView(j), mat.NewVecDense(n, s.psi))
		rest.SetVec(j, kinetic+(r*r/2+field-s.Mu)*s.psi[j])
		jacobian.Set(j, j, jacobian.At(j, j)+r*r/2+3*field-s.Mu)
		jacobian.Set(j, n, -s.psi[j])
		weighted := 4 * math.Pi * s.grid.weight[j] * r * r * s.psi[j]
		jacobian.Set(n, j, 2*weighted)
		norm += weighted * s.psi[j]
	}
	rest.SetVec(n, norm)
	for k := range n + 1 {
		jacobian.Set(0, k, 0)
	}
	jacobian.Set(0, 0, 1)
	rest.SetVec(0, s.psi[0])
	var step mat.VecDense
	if err := step.SolveVec(jacobian, rest); err != nil {
		return 0, err
	}
	s.Mu -= step.AtVec(n)
	largest, size := 0., 0.
	for j := range s.psi {
		s.psi[j] -= step.AtVec(j)
		largest = math.Max(largest, math.Abs(step.AtVec(j)))
		size = math.Max(size, math.Abs(s.psi[j]))
	}
	return largest / size, nil
}

// energies fills in the parts of the energy.
func (s *GroundState) energies() {
	var slope mat.VecDense
	slope.MulVec(s.grid.slope, mat.NewVecDense(len(s.psi), s.psi))
	s.Kinetic = s.grid.integral(func(j int) float64 { return slope.AtVec(j) * slope.AtVec(j) / 2 })
	s.Potential = s.grid.integral(func(j int) float64 { x := s.grid.r[j] * s.psi[j]; return x * x / 2 })
	s.Interaction = s.grid.integral(func(j int) float64 { return 2 * math.Pi * s.G * math.Pow(s.psi[j], 4) })
	s.Energy = s.Kinetic + s.Potential + s.Interaction
}

// Release returns the energy per atom that the condensate frees when the trap is switched
// off at once.
func (s *GroundState) Release() float64 { return s.Kinetic + s.Interaction }

// Density returns |ψ|² at the distance r from the centre.
func (s *GroundState) Density(r float64) float64 {
	psi := s.grid.at(s.psi, r)
	return psi * psi
}

// Column returns the column density ∫ |ψ|² dz at the distance rho from the axis.
func (s *GroundState) Column(rho float64) float64 {
	reach := s.Radius*s.Radius - rho*rho
	if reach <= 0 {
		return 0
	}
	return 2 * quad.Fixed(func(z float64) float64 { return s.Density(math.Hypot(rho, z)) }, 0, math.Sqrt(reach), 80, nil, 0)
}

// RMS returns the rms size of the density along one axis.
func (s *GroundState) RMS() float64 { return math.Sqrt(2 * s.Potential / 3) }
