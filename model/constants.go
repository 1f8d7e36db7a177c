// Package model is the physics of trapped Bose gases and of their shadow: pure
// functions in SI units that know neither pixels nor files.
package model

import "math"

// Physical constants, CODATA 2022 (Mohr, Newell, Taylor, Tiesinga, Rev. Mod. Phys.
// 97, 025002 (2025)); H, KB and C are exact by definition of the SI.
const (
	H    = 6.62607015e-34    // Planck constant, J s
	HBar = H / (2 * math.Pi) // reduced Planck constant, J s
	KB   = 1.380649e-23      // Boltzmann constant, J/K
	C    = 299792458.0       // speed of light, m/s
	A0   = 5.29177210544e-11 // Bohr radius, m
	U    = 1.66053906892e-27 // atomic mass constant, kg
	MuB  = 9.2740100657e-24  // Bohr magneton, J/T
	G0   = 9.80665           // standard gravity, m/s² (definition)
)
