package page

import (
	"context"
	"errors"
	"testing"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/imageio"
)

// Who leaves while a shot is measured for him leaves no view without a fit behind, and what
// fails for now is tried again; a shot that failed for good is measured once.
func TestViewsKeepNoHalf(t *testing.T) {
	s, row := newStill(), &ledger.Row{Shot: "shot_2"}
	fault, measured := error(nil), 0
	v := newViews(func(ctx context.Context, shot string) (f *report.Facts, raw *imageio.Raw, err error) {
		measured++
		if f, raw, _ = s.Measure(ctx, shot); fault != nil {
			return nil, raw, fault
		}
		return f, raw, nil
	})
	ctx, leave := context.WithCancel(context.Background())
	leave()
	fault = context.Canceled
	v.get(ctx, row)
	fault = errors.New("nothing to fit with yet")
	if got, err := v.get(context.Background(), row); err != nil || got.pictures["frame"] == nil {
		t.Errorf("the frame is not shown: %v", err)
	}
	fault = nil
	if got, err := v.get(context.Background(), row); err != nil || got.pictures["density"] == nil {
		t.Errorf("the fit is not shown: %v", err)
	}
	row = &ledger.Row{Shot: "failed", Reason: "no fit"}
	fault, measured = errors.New("no fit"), 0
	for range 2 {
		if got, err := v.get(context.Background(), row); err != nil || got.pictures["frame"] == nil {
			t.Errorf("the frame of a failed shot is not shown: %v", err)
		}
	}
	if measured != 1 {
		t.Errorf("it was measured %d times", measured)
	}
}
