package lm

// damping is the control of λ by the gain ratio, the decrease of F that came over the one
// that the linear model promised.
type damping struct {
	lambda float64
	growth float64 // of λ at the next failure
}

const (
	lambdaFloor = 1e-14 // below it λ is 0: a Gauss-Newton step
	lambdaBack  = 1e-12  // where λ starts to grow again from below
	lambdaTop   = 1e20
)

func (c *damping) start(lambda float64) {
	switch {
	case lambda == 0:
		lambda = 1e-3
	case lambda < 0:
		lambda = 0
	}
	*c = damping{lambda: lambda, growth: 2}
}

func (c *damping) good(gain float64) {
	u := 2*gain - 1
	c.lambda *= max(0.2, 1-u*u*u)
	if c.lambda < lambdaFloor {
		c.lambda = 0
	}
	c.growth = 2
}

func (c *damping) bad() {
	c.lambda = max(c.lambda, lambdaBack) * c.growth
	c.growth = 2*c.growth
}

func (c *damping) exhausted() bool { return c.lambda > lambdaTop }
