package model

import "math"

// speciesRow is a species in the units of the literature.
type speciesRow struct {
	name             string
	mass             float64 // u
	wavelength       float64 // vacuum, nm
	linewidth        float64 // Γ/2π, MHz
	a                float64 // scattering length in Bohr radii, NaN: the user must give it
	state            string
	tunable, dipolar bool
	source           string
}

// speciesTable: masses from AME2020 (Huang et al., Chin. Phys. C 45, 030002 (2021); Wang
// et al. 030003). In the sources, "read" means that the value was read in the source or
// its abstract, "quoted" that it was seen in a text quoting it, "memory" neither.
var speciesTable = []speciesRow{
	{"1H", 1.007825031898, 121.56682, 99.71, 1.2245, "|1,1>", false, false,
		"Lyman-alpha, NIST ASD (memory); a: Jamieson, Dalgarno, Kimura, PRA 51, 2626 (1995) (memory)"},
	{"4He*", 4.00260325413, 1083.3306, 1.626, 141.96, "m=+1", false, false,
		"2 3S1-2 3P2, NIST ASD (memory); a: Moal et al., PRL 96, 023203 (2006), 7.512(5) nm (read)"},
	{"7Li", 7.01600343426, 670.961561, 5.8724, -27.3, "|2,2>", true, false,
		"D2, McAlexander et al., PRA 54, R5 (1996) (quoted); a at zero field: Abraham et al., PRL 74, 1315 (1995), -27.3(8) (read)"},
	{"23Na", 22.98976928195, 589.1583264, 9.7946, 54.54, "|1,-1>", false, false,
		"D2, Steck, Sodium D line data (quoted); a: Knoop et al., PRA 83, 042704 (2011), 54.54(20) (quoted)"},
	{"39K", 38.96370648482, 766.700921822, 6.035, math.NaN(), "|1,1>", true, false,
		"D2, Tiecke, Properties of potassium (2011) (quoted); a tuned at 402 G: D'Errico et al., New J. Phys. 9, 223 (2007) (memory)"},
	{"41K", 40.96182525611, 766.7004587, 6.035, 60.54, "|2,2>", false, false,
		"D2, Tiecke, Properties of potassium (2011) (memory); a: Falke et al., PRA 78, 012503 (2008), 60.54(6) (memory)"},
	{"52Cr", 51.940504714, 425.5523, 5.02, 102.5, "m=-3", true, true,
		"7S3-7P4, NIST ASD (memory); a off resonance: Pasquiou et al., PRA 81, 042716 (2010), 102.5(4) (memory)"},
	{"84Sr", 83.913419118, 460.8622, 30.24, 122.7, "1S0", false, false,
		"1S0-1P1, 88Sr wavelength NIST ASD (quoted), width Yasuda et al., PRA 73, 011403 (2006) (memory); a: Stein, Knöckel, Tiemann, EPJ D 57, 171 (2010), 122.7(3) (memory)"},
	{"85Rb", 84.91178973604, 780.241368271, 6.0666, math.NaN(), "|2,-2>", true, false,
		"D2, Steck, Rubidium 85 D line data (read); a tuned at 155 G: Claussen et al., PRA 67, 060701 (2003) (memory)"},
	{"87Rb", 86.909180529, 780.241209686, 6.0666, 100.4, "|1,-1>", false, false,
		"D2, Steck, Rubidium 87 D line data (read); a: van Kempen et al., PRL 88, 093201 (2002), 100.4(1) (quoted)"},
	{"133Cs", 132.905451958, 852.34727582, 5.234, math.NaN(), "|3,3>", true, false,
		"D2, Steck, Cesium D line data (read); a tuned near 20 G: Berninger et al., PRA 87, 032517 (2013) (memory)"},
	{"162Dy", 161.926804507, 421.2905, 32.2, 122, "m=-8", true, true,
		"421 nm, Lu, Youn, Lev, PRA 83, 012510 (2011) (memory); background a: Tang et al., PRA 92, 022703 (2015), 122(10) (read)"},
	{"164Dy", 163.929180819, 421.2905, 32.2, 92, "m=-8", true, true,
		"421 nm, Lu, Youn, Lev, PRA 83, 012510 (2011) (memory); background a: Tang et al., PRA 92, 022703 (2015), 92(8) (read)"},
	{"166Er", 165.930301067, 400.9083, 29.7, math.NaN(), "m=-6", true, true,
		"401 nm, Lawler et al., J. Phys. B 43, 235001 (2010) (memory); a tuned: Chomaz et al., PRX 6, 041039 (2016) (memory)"},
	{"168Er", 167.932378282, 400.9083, 29.7, 137, "m=-6", true, true,
		"401 nm, Lawler et al., J. Phys. B 43, 235001 (2010) (memory); a at low field: Baier et al., Science 352, 201 (2016), 137(1) (memory)"},
	{"174Yb", 173.938867545, 398.9114, 29.13, 104.9, "1S0", false, false,
		"1S0-1P1, NIST ASD (quoted), width Takasu et al., PRL 93, 123202 (2004) (memory); a: Kitagawa et al., PRA 77, 012719 (2008), 5.55(8) nm (read)"},
}

// stateTable holds scattering lengths (Bohr radii) of states beside those of speciesTable.
var stateTable = []struct {
	name, state string
	a           float64
	source      string
}{
	{"87Rb", "|2,2>", 98.98, "D2, Steck, Rubidium 87 D line data (read); a: triplet, van Kempen et al., PRL 88, 093201 (2002), 98.98(4) (memory)"},
	{"87Rb", "|2,1>", 95.44, "D2, Steck, Rubidium 87 D line data (read); a: Egorov et al., PRA 87, 053614 (2013), 95.44(7) (memory)"},
	{"23Na", "|1,1>", 54.54, "D2, Steck, Sodium D line data (quoted); a: Knoop et al., PRA 83, 042704 (2011), 54.54(20) (quoted)"},
	{"23Na", "|2,2>", 64.30, "D2, Steck, Sodium D line data (quoted); a: triplet, Knoop et al., PRA 83, 042704 (2011), 64.30(40) (quoted)"},
	{"7Li", "|1,1>", math.NaN(), "D2, McAlexander et al., PRA 54, R5 (1996) (quoted); a tuned at 738 G"},
}
