package lm

// Termination is the reason why a minimisation ended.
type Termination int

// The reasons; each row of the table below says what it means.
const (
	Unfinished Termination = iota
	SmallStep
	SmallDecrease
	PredictedDecrease
	SmallGradient
	RoundingLimit
	NothingFree
	Stalled
	IterationLimit
	StartOutside
	Cancelled
)

var terminations = [...]struct {
	name, sentence string
	usable         bool
}{
	Unfinished:        {"unfinished", "the minimisation has not run", false},
	SmallStep:         {"small step", "the next step would change the parameters by less than the tolerance", true},
	SmallDecrease:     {"small decrease", "the next step would lower the sum of squares by less than its relative tolerance", true},
	PredictedDecrease: {"predicted decrease", "the next step would lower the sum of squares by less than its absolute tolerance", true},
	SmallGradient:     {"small gradient", "no free parameter changes the sum of squares to first order", true},
	RoundingLimit:     {"rounding limit", "the next step would lower the sum of squares by less than its rounding error", true},
	NothingFree:       {"nothing free", "every parameter is fixed; the sum of squares was evaluated once", true},
	Stalled:           {"stalled", "no step lowers the sum of squares as the derivatives promise: they are wrong, or the model has a kink here", false},
	IterationLimit:    {"iteration limit", "the iterations ran out before the tolerances were met", false},
	StartOutside:      {"start outside", "the model has no finite value or derivative at the start", false},
	Cancelled:         {"cancelled", "the work was cancelled", false},
}

func (t Termination) row() int {
	if t < 0 || int(t) >= len(terminations) {
		return 0
	}
	return int(t)
}

// String is the reason in one or two words.
func (t Termination) String() string { return terminations[t.row()].name }

// Sentence says the reason to a person.
func (t Termination) Sentence() string { return terminations[t.row()].sentence }

// Usable says whether the parameters are those of a minimum.
func (t Termination) Usable() bool { return terminations[t.row()].usable }
