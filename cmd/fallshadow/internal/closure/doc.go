// Package closure holds no code, only tests: nights of simulated shots go the way of real
// ones, from frames to numbers, and what comes out is held against the truth that was drawn
// and against the Cramer-Rao bound of each shot.
//
// The short form runs with the other tests. The one whose figures are asked for is
//
//	FALLSHADOW_CLOSURE=200 go test -run Closure -v -timeout 0 ./cmd/fallshadow/internal/closure
//
// which prints tables of 200 shots a night; FALLSHADOW_CLOSURE_CSV names a folder for the
// shots one by one.
package closure
