package night

import (
	"fmt"
	"runtime"
	"strings"
)

// caught turns a panic of the calling function into its error, naming where it arose.
func caught(err *error) {
	if r := recover(); r != nil {
		*err = fmt.Errorf("internal error in %s: %v: please report it with the shot", origin(), r)
	}
}

// origin names the function that panicked.
func origin() string {
	pc := make([]uintptr, 64)
	frames := runtime.CallersFrames(pc[:runtime.Callers(0, pc)])
	panicked := false
	for {
		f, more := frames.Next()
		inside := strings.HasPrefix(f.Function, "runtime.")
		panicked = panicked || f.Function == "runtime.gopanic"
		if panicked && !inside {
			return f.Function
		}
		if !more {
			return "an unknown function"
		}
	}
}
