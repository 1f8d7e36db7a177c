package lm

// damping is the control of λ by the gain ratio, the decrease of F that came over the one
// that the linear model promised.
type damping struct {
	lambda float64
	growth float64 // of λ at the next failure
}

const (
	lambdaFloor = 1e-14 // below it λ is 0: a Gauss-Newton step
	lambdaBack  = 1e-6  // where λ starts to grow again from below
	lambdaTop   = 1e20
)

func (c *damping) start(lambda float64) {
	switch {
	case lambda == 0:
		lambda = 1e-3
	case lambda < 0:
		lambda = 0
	}
	*c = damping{lambda: lambda, growth: 4}
}

func (c *damping) good(gain float64) {
	switch {
	case gain > 0.75:
		c.lambda *= 0.05
	case gain < 0.25:
		c.lambda = max(c.lambda, lambdaBack) * 4
	}
	if c.lambda < lambdaFloor {
		c.lambda = 0
	}
	c.growth = 4
}

func (c *damping) bad() {
	c.lambda = max(c.lambda, lambdaBack) * c.growth
	c.growth = min(2*c.growth, 64)
}

func (c *damping) exhausted() bool { return c.lambda > lambdaTop }
