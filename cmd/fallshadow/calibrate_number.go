package main

import "context"

// calibrateNumberCmd looks for a common error of the atom numbers of a night.
type calibrateNumberCmd struct{ nightArgs }

// Run prints the hypotheses, and the setting to paste where one is named.
func (c *calibrateNumberCmd) Run(ctx context.Context, t terminal) error {
	n, chosen, err := c.load(ctx)
	if err != nil {
		return err
	}
	return n.WriteNumber(ctx, t.out, chosen)
}
