package night

// Progress is told how the work goes on; it counts and shows nothing itself. Its methods
// are called from one goroutine at a time.
type Progress interface {
	// Begin opens a stage of so many steps, at least one.
	Begin(stage string, steps int)
	// Step says that one more is done; line, where not empty, tells of it, and failed
	// lines are worth more than a glance.
	Step(line string, failed bool)
	// End closes the stage, be it complete or not.
	End()
}
