package watch

import (
	"iter"
	"slices"

	"fallshadow/cmd/fallshadow/internal/night"
	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/imageio"
)

const (
	// most is how many benches are kept.
	most = 4
	// first and enough are how many of the latest shots a bench is prepared from, at the
	// start and at last.
	first, enough = 6, 16
)

// stand returns the bench for a key, which may still be in the making.
func (d *desk) stand(k key) *stand {
	d.mu.Lock()
	defer d.mu.Unlock()
	if i := slices.IndexFunc(d.stands, func(s *stand) bool { return s.key == k }); i >= 0 {
		s := d.stands[i]
		d.stands = slices.Insert(slices.Delete(d.stands, i, i+1), 0, s)
		return s
	}
	s := d.make(k, first, false)
	if k.lab == d.lab {
		d.keep(s)
	}
	return s
}

// keep puts a bench in front of the others; the lock is held.
func (d *desk) keep(s *stand) {
	d.stands = slices.Insert(d.stands, 0, s)
	d.stands = d.stands[:min(len(d.stands), most)]
}

// make begins a bench from so many of the latest shots, a warm one with the lights of the
// last shot at hand. The lock is held.
func (d *desk) make(k key, latest int, warm bool) *stand {
	s := &stand{key: k, made: make(chan struct{})}
	for a := max(0, d.arrivals-latest); a < d.arrivals; a++ {
		s.from = append(s.from, a)
	}
	shots := d.arrivals
	d.work.Go(func() {
		defer close(s.made)
		lab := k.lab
		if k.own {
			lab = withOwnLight(lab)
		}
		s.bench, s.err = night.NewBench(d.ctx, lab, k.region, d.frames(s.from), shots, d.read)
		if s.err == nil && warm {
			_, s.err = s.bench.Lights(d.ctx, shots-1)
		}
		if s.err != nil {
			d.forget(s)
		}
	})
	return s
}

func withOwnLight(lab *settings.Settings) *settings.Settings {
	own := *lab
	own.Fit.Reference = "own"
	return &own
}

// forget drops a bench that came to nothing, so that the next shot tries anew.
func (d *desk) forget(s *stand) {
	d.mu.Lock()
	defer d.mu.Unlock()
	d.stands = slices.DeleteFunc(d.stands, func(t *stand) bool { return t == s })
}

// frames yields the night's darks and the shots of some arrivals.
func (d *desk) frames(arrivals []int) iter.Seq[*imageio.Raw] {
	d.mu.Lock()
	darks := d.darks
	d.mu.Unlock()
	return func(yield func(*imageio.Raw) bool) {
		for _, file := range darks {
			list, _ := d.dark(d.ctx, file) // a dark that cannot be read is as good as none
			for _, frame := range list {
				raw := new(imageio.Raw)
				raw.Frames[imageio.Dark] = frame
				if !yield(raw) {
					return
				}
			}
		}
		for _, a := range arrivals {
			if raw, err := d.read(d.ctx, a); err == nil && !yield(raw) {
				return
			}
		}
	}
}

// renew begins a better bench in place of one that was prepared from few shots; it takes
// over once it is made and warm.
func (d *desk) renew(s *stand) {
	d.mu.Lock()
	defer d.mu.Unlock()
	if n := len(s.from); s.renews || n >= enough || d.arrivals < min(2*n, enough) || s.lab != d.lab {
		return
	}
	s.renews = true
	better := d.make(s.key, enough, true)
	d.work.Go(func() {
		<-better.made
		d.mu.Lock()
		defer d.mu.Unlock()
		s.renews = false
		if i := slices.Index(d.stands, s); i >= 0 && better.err == nil {
			d.stands[i] = better
		}
	})
}
