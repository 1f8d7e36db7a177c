package fit

import (
	"context"
	"image"
	"testing"
)

// wideScene is a cloud off the middle of a large picture, with another far from it on request.
func wideScene(t testing.TB, second bool) *scene {
	sc := standardScene(t, 150e-9, 6e4, 31)
	sc.w, sc.h, sc.x, sc.y, sc.second = 760, 700, 530.4, 210.7, second
	return sc
}

// TestWindow: the part of a large picture that is chosen tells the cloud as well as all of it,
// from the place that was found as from none, and better where something else is in it.
func TestWindow(t *testing.T) {
	ctx, ws := context.Background(), NewWorkspace()
	sc := wideScene(t, false)
	pic := sc.draw(t)
	p, err := Locate(ctx, pic, sc.lab, sc.flight, Options{}, ws)
	if err != nil {
		t.Fatal(err)
	}
	w := p.Window
	if at := image.Pt(int(sc.x), int(sc.y)); !at.In(w.Inset(60)) || 2*w.Dx()*w.Dy() > pic.Width*pic.Height || !w.In(image.Rect(0, 0, pic.Width, pic.Height)) {
		t.Fatalf("the window is %v", w)
	}
	whole := mustFit(t, sc, pic, Options{})
	part := pic.Crop(w)
	near, anew := mustFit(t, sc, part, Options{Near: p.In(w)}), mustFit(t, sc, part, Options{})
	if near.Touches || near.Model != ModelBimodal {
		t.Errorf("%s, touches %v", near.Model, near.Touches)
	}
	for _, q := range []struct {
		name              string
		whole, near, anew float64
		err               float64
	}{
		{"x", whole.X, near.X + float64(w.Min.X), anew.X + float64(w.Min.X), 0.05},
		{"y", whole.Y, near.Y + float64(w.Min.Y), anew.Y + float64(w.Min.Y), 0.05},
		{"N", whole.Numbers.Atoms.V, near.Numbers.Atoms.V, anew.Numbers.Atoms.V, whole.Numbers.Atoms.Err},
		{"T", whole.Numbers.T.V, near.Numbers.T.V, anew.Numbers.T.V, whole.Numbers.T.Err},
		{"N0", whole.Numbers.Condensate.V, near.Numbers.Condensate.V, anew.Numbers.Condensate.V, whole.Numbers.Condensate.Err},
	} {
		within(t, q.name+" of the part", q.near, q.whole, 0.4*q.err)
		within(t, q.name+" from the place", q.near, q.anew, 0.02*q.err)
	}
	within(t, "error of N, part over whole", near.Numbers.Atoms.Err/whole.Numbers.Atoms.Err, 1, 0.03)
	within(t, "error of T, part over whole", near.Numbers.T.Err/whole.Numbers.T.Err, 1, 0.03)

	sc = wideScene(t, true)
	pic = sc.draw(t)
	if p, err = Locate(ctx, pic, sc.lab, sc.flight, Options{}, ws); err != nil {
		t.Fatal(err)
	}
	if image.Pt(int(0.15*float64(sc.w)), int(0.85*float64(sc.h))).In(p.Window) {
		t.Errorf("the other cloud is in the window %v", p.Window)
	}
	r := mustFit(t, sc, pic.Crop(p.Window), Options{Near: p.In(p.Window)})
	within(t, "N beside another cloud", r.Numbers.Atoms.V, near.Numbers.Atoms.V, 0.1*r.Numbers.Atoms.Err)
}

// TestTouches: a cloud is said to reach over the border where its radius or two widths do.
func TestTouches(t *testing.T) {
	sc := standardScene(t, 150e-9, 6e4, 32)
	if r := mustFit(t, sc, sc.draw(t), Options{}); r.Touches {
		t.Error("a cloud in the middle touches the border")
	}
	sc.x = 20
	if r := mustFit(t, sc, sc.draw(t), Options{}); !r.Touches {
		t.Error("a cloud at the border does not touch it")
	}
}
