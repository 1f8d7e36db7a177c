package page

import (
	"context"
	"encoding/json"
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
	v.get(ctx, row, false)
	fault = errors.New("nothing to fit with yet")
	if got, err := v.get(context.Background(), row, false); err != nil || got.pictures["frame"] == nil {
		t.Errorf("the frame is not shown: %v", err)
	}
	fault = nil
	if got, err := v.get(context.Background(), row, false); err != nil || got.pictures["density"] == nil {
		t.Errorf("the fit is not shown: %v", err)
	}
	row = &ledger.Row{Shot: "failed", Reason: "no fit"}
	fault, measured = errors.New("no fit"), 0
	for range 2 {
		if got, err := v.get(context.Background(), row, false); err != nil || got.pictures["frame"] == nil {
			t.Errorf("the frame of a failed shot is not shown: %v", err)
		}
	}
	if measured != 1 {
		t.Errorf("it was measured %d times", measured)
	}
}

// A picture that is drawn with other settings than the numbers are of says so, and not a moment
// longer than that is so.
func TestStaleView(t *testing.T) {
	p, s, url := newServer(t, "")
	look := func() (v struct {
		Mark  string
		Stale bool
	}) {
		t.Helper()
		_, body := ask(t, "GET", url+"/api/view?shot=shot_2", "")
		if err := json.Unmarshal([]byte(body), &v); err != nil || v.Mark == "" {
			t.Fatalf("%v, %s", err, body)
		}
		return v
	}
	s.drawnOtherwise = true
	f, raw, _ := s.Measure(context.Background(), "shot_2")
	p.Picture("shot_2", f, raw)
	first := look()
	settings := func(same bool) {
		s.rows[0].Stale = !same
		p.Changed()
	}
	settings(false)
	if v := look(); v != first || v.Stale {
		t.Errorf("the picture of the fit is %+v", v)
	}
	p.views = newViews(p.measure) // it was long ago
	stale := look()
	if !stale.Stale {
		t.Error("the picture does not say that it is of other settings")
	}
	settings(false)
	if v := look(); v.Mark == stale.Mark {
		t.Error("the picture is of the settings of before")
	}
	settings(true)
	if v := look(); v.Stale {
		t.Error("the picture is of other settings still")
	}
	settings(false)
	p.views, s.drawnOtherwise = newViews(p.measure), false
	if v := look(); v.Stale {
		t.Error("numbers and picture are both without the region")
	}
}
