package main

import (
	"fmt"
	"strconv"
)

// atLeastOne is a number of things on the command line; left out it is 0.
type atLeastOne int

// UnmarshalText refuses what is below 1.
func (n *atLeastOne) UnmarshalText(text []byte) error {
	v, err := strconv.Atoi(string(text))
	if err != nil || v < 1 {
		return fmt.Errorf("%q: write a whole number from 1 on", text)
	}
	*n = atLeastOne(v)
	return nil
}
