package curve

import (
	"math"

	"fallshadow/model"
)

// Law is a law for the condensate fraction N0/N at t = T/Tc⁰.
type Law struct {
	Name string // a word for options and tables
	// Title names it in a legend; Note says what it holds for, and its source.
	Title, Note string
	fraction    func(th *Theory, t, n float64, g *scales) float64
	repulsive   bool // needs a > 0
	numeric     bool // comes from a table of Theory
}

// The names of the laws.
const (
	Ideal       = "ideal"
	FiniteSize  = "finite-size"
	Interacting = "interacting"
	SemiIdeal   = "semi-ideal"
	HartreeFock = "hartree-fock"
)

// Laws is the one table of laws.
var Laws = []Law{
	{Name: Ideal, Title: "ideal gas, 1 - t^3",
		Note:     "thermodynamic limit, no interaction; Dalfovo et al., Rev. Mod. Phys. 71, 463 (1999)",
		fraction: func(_ *Theory, t, _ float64, _ *scales) float64 { return model.IdealFraction(t) }},
	{Name: FiniteSize, Title: "ideal gas, finite size",
		Note:     "first order in N^(-1/3): within 0.006 of the exact sum over levels for N above 1e4, 0 too early near Tc; Dalfovo et al. (1999), Eq. (19)",
		fraction: func(_ *Theory, t, n float64, g *scales) float64 { return model.FiniteSizeFraction(t, n, g.Trap) }},
	{Name: Interacting, Title: "interacting, first order", repulsive: true,
		Note:     "closed form to lowest order in eta = mu(T=0)/kTc0: within 0.03 of the numbers for t up to 0.7 at eta 0.4, 0 too early near Tc; Naraschewski, Stamper-Kurn, Phys. Rev. A 58, 2423 (1998)",
		fraction: func(_ *Theory, t, n float64, g *scales) float64 { return model.InteractingFraction(t, g.eta(n)) }},
	{Name: SemiIdeal, Title: "semi-ideal", repulsive: true, numeric: true,
		Note:     "Thomas-Fermi condensate, ideal thermal atoms outside of its mean field; Tc is that of the ideal gas; Naraschewski, Stamper-Kurn (1998)",
		fraction: func(th *Theory, t, n float64, g *scales) float64 { return th.semiIdeal.at(t, g.logEtaOf(n)) }},
	{Name: HartreeFock, Title: "Hartree-Fock", repulsive: true, numeric: true,
		Note:     "local density, with the mean field of the thermal atoms, which lowers Tc; the small jump at the end is an artefact of the theory; Minguzzi, Conti, Tosi, J. Phys.: Condens. Matter 9, L33 (1997)",
		fraction: func(th *Theory, t, n float64, g *scales) float64 { return th.hartreeFock.at(t, g.logEtaOf(n)) }},
}

// Theory evaluates the laws for one gas. The numeric ones depend on t and η = μ(T=0)/kTc⁰
// alone and are tabulated once.
type Theory struct {
	gas                    *scales
	semiIdeal, hartreeFock *fractionTable
}

// NewTheory prepares the laws for numbers of atoms between low and high, 0 < low ≤ high.
func NewTheory(g Gas, low, high float64) *Theory {
	th := &Theory{gas: g.scales()}
	if g.repulsive() {
		th.semiIdeal = tabulate(th.gas, low, high, model.SemiIdealAt)
		th.hartreeFock = tabulate(th.gas, low, high, model.HartreeFockAt)
	}
	return th
}

// Laws returns the laws that hold for the gas.
func (th *Theory) Laws() []Law {
	var list []Law
	for _, l := range Laws {
		if !l.repulsive || th.gas.repulsive() {
			list = append(list, l)
		}
	}
	return list
}

// Fraction returns the condensate fraction of n atoms at t = T/Tc⁰; NaN where the law does
// not hold for the gas.
func (th *Theory) Fraction(l Law, t, n float64) float64 { return th.fraction(l, t, n, th.gas) }

func (th *Theory) fraction(l Law, t, n float64, g *scales) float64 {
	if l.repulsive && !th.gas.repulsive() {
		return math.NaN()
	}
	return l.fraction(th, t, n, g)
}

// Entropy returns the entropy per atom in k of n atoms at t = T/Tc⁰ as a semi-ideal gas,
// NaN for a gas that is not repulsive. The ideal one is model.IdealEntropy.
func (th *Theory) Entropy(t, n float64) float64 {
	if !th.gas.repulsive() || !(t > 0) {
		return math.NaN()
	}
	temperature := t * model.CriticalTemperature(n, th.gas.Trap)
	f := th.semiIdeal.at(t, th.gas.logEtaOf(n))
	if f <= 0 {
		return model.IdealEntropy(t)
	}
	return model.SemiIdealEntropy(temperature, th.gas.mu(f*n), th.gas.Trap) / n
}

// Find returns the law of the given name.
func Find(name string) (Law, bool) {
	for _, l := range Laws {
		if l.Name == name {
			return l, true
		}
	}
	return Law{}, false
}
