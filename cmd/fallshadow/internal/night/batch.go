// Package night runs a night of shots: it freezes the list of them, finds out which rows
// of the ledger are current, lets workers fit the others, and writes the table.
package night

import (
	"context"
	"errors"
	"fmt"
	"image"
	"iter"
	"path/filepath"
	"runtime"
	"slices"
	"sync"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
	"fallshadow/cmd/fallshadow/internal/settings"
	"fallshadow/imageio"
)

// Options say what to run.
type Options struct {
	Dir      string // the night
	Out      string // folder of the results, empty for that of Results
	Settings *settings.Settings
	Workers  int  // 0 for one a processor
	Again    bool // fit current rows too
	// OwnRegion leaves out the regions that were drawn by hand.
	OwnRegion bool
	// Pictures, where set, are drawn of every shot that is fitted; a shot that lacks its
	// picture is fitted too.
	Pictures Pictures
}

// Pictures are of the shots of a night; they may be used by many goroutines.
type Pictures interface {
	// Has reports whether the picture of a row is there.
	Has(r *ledger.Row) bool
	// Draw makes it, from facts that hold maps.
	Draw(r *ledger.Row, f *report.Facts) error
}

// Outcome is what a run left.
type Outcome struct {
	Dir    string       // of the results
	Rows   []ledger.Row // of the table, in natural order
	Fitted int          // shots that were fitted now, failed ones included
	Kept   int          // shots whose rows were current
	Failed int          // rows of failed shots
	Strays []imageio.Stray
	// Cautions are of settings that frames, or what was measured of the camera, show to be odd.
	Cautions []string
}

// Results returns the folder of a night's results: results/<night> below the working
// directory.
func Results(dir string) (string, error) {
	abs, err := filepath.Abs(dir)
	if err != nil {
		return "", fmt.Errorf("find the night %s: %w", dir, err)
	}
	base := filepath.Base(abs)
	if filepath.Dir(abs) == abs {
		return "", fmt.Errorf("the night %s has no name to call its results by: name a folder with --out", dir)
	}
	return filepath.Join("results", base), nil
}

// batch is one run over a frozen list of shots.
type batch struct {
	Options
	root     string // absolute path of the night without links
	layout   imageio.Layout
	settings ledger.Digest
	scanned  imageio.Night
	prepare  prepare
	progress Progress
	ledger   *ledger.Ledger

	shots     []shot // in natural order
	readable  []int  // places in shots
	darks     []ledger.Digest
	reference ledger.Digest
	regions   []ledger.Region
	preparing sync.Mutex
	benches   shelf[func() measure] // by what regionOf says, and Everything
	undrawn   onceError             // of the pictures
}

// Batch fits the shots of a night that have no current row and writes the table. It
// fails when the night cannot be run at all; a shot that cannot be fitted has a row that
// says why. When ctx is done in the middle the shots fitted so far stand in ledger and
// table, rows that are not current are flagged, and Batch returns the cause of ctx with
// the outcome so far.
func Batch(ctx context.Context, o Options, p Progress) (*Outcome, error) {
	var known *settings.Settings
	out, err := run(ctx, o, p, newBench(o.Pictures != nil, func(s *settings.Settings) { known = s }))
	if out != nil && known != nil {
		before := o.Settings.Warnings()
		for _, w := range known.Warnings() {
			if !slices.Contains(before, w) {
				out.Cautions = append(out.Cautions, w)
			}
		}
	}
	return out, err
}

func run(ctx context.Context, o Options, p Progress, prepare prepare) (_ *Outcome, err error) {
	b := &batch{Options: o, layout: o.Settings.Layout(), settings: o.Settings.Digest(), prepare: prepare, progress: p}
	if b.Out == "" {
		if b.Out, err = Results(b.Dir); err != nil {
			return nil, err
		}
	}
	if err := b.find(ctx); err != nil {
		return nil, err
	}
	if b.ledger, err = ledger.Open(ctx, b.Out, b.root, b.knows(ctx)); err != nil {
		return nil, err
	}
	defer func() { err = errors.Join(err, b.ledger.Close()) }()
	if err := b.survey(ctx); err != nil {
		return nil, err
	}
	return b.work(ctx)
}

// find freezes the list of shots and settles the number of workers.
func (b *batch) find(ctx context.Context) (err error) {
	if b.Workers <= 0 {
		b.Workers = runtime.NumCPU()
	}
	if b.root, err = filepath.Abs(b.Dir); err == nil {
		b.root, err = filepath.EvalSymlinks(b.root)
	}
	if err != nil {
		return fmt.Errorf("find the night %s: %w", b.Dir, err)
	}
	if b.scanned, err = imageio.Scan(ctx, b.root, b.layout); err != nil {
		return err
	}
	if len(b.scanned.Shots) > 0 {
		return nil
	}
	why := "it holds no camera files"
	if s := b.scanned.Strays; len(s) > 0 {
		why = fmt.Sprintf("%d files fit no shot, such as %s: %s", len(s), s[0].Path, s[0].Reason)
	}
	return fmt.Errorf("no shots in %s: %s; check the folder and [shots] in the settings", b.Dir, why)
}

// knows returns what finds a shot of a ledger in this night.
func (b *batch) knows(ctx context.Context) func(string, ledger.Digest) bool {
	return func(name string, content ledger.Digest) bool {
		i, ok := slices.BinarySearchFunc(b.scanned.Shots, name, func(s imageio.Shot, name string) int {
			return imageio.Natural(s.Name, name)
		})
		if !ok {
			return false
		}
		seen, _ := b.look(ctx, b.scanned.Shots[i])
		return seen.content.Same(content)
	}
}

// survey reads every shot once: it notes what the rows depend on and makes the bench for
// the region of the settings ready.
func (b *batch) survey(ctx context.Context) error {
	f := &frames{load: b.load}
	b.progress.Begin("reading", len(b.scanned.Shots))
	f.all = b.firstLook(ctx, f)
	worker, err := b.prepare(ctx, b.Settings, image.Rectangle{}, f)
	b.progress.End()
	if ctx.Err() != nil {
		return context.Cause(ctx)
	}
	if complete := len(b.shots) == len(b.scanned.Shots); err != nil && !(complete && f.n == 0) {
		return fmt.Errorf("prepare %s: %w", b.Dir, err)
	}
	b.benches = shelf[func() measure]{most: keptBenches}
	b.benches.put(image.Rectangle{}, worker)
	b.reference = referenceDigest(b.shots, b.darks)
	if b.OwnRegion {
		return nil
	}
	b.regions, err = b.ledger.Regions(ctx)
	return err
}

// firstLook yields the frames of the night and fills in what the batch knows of its shots.
func (b *batch) firstLook(ctx context.Context, f *frames) iter.Seq[*imageio.Raw] {
	return func(yield func(*imageio.Raw) bool) {
		if !b.yieldDarks(ctx, true, yield) {
			return
		}
		type seen struct {
			shot
			raw *imageio.Raw
		}
		for i, s := range inOrder(len(b.scanned.Shots), b.Workers, func(i int) (s seen) {
			s.shot, s.raw = b.look(ctx, b.scanned.Shots[i])
			return s
		}) {
			b.shots = append(b.shots, s.shot)
			b.progress.Step("", false)
			if s.raw == nil {
				continue
			}
			b.readable = append(b.readable, i)
			f.n++
			if !yield(s.raw) {
				return
			}
		}
	}
}

// yieldDarks yields the dark frames that belong to the night and to no shot, and at first
// takes note of them and of files that hold none.
func (b *batch) yieldDarks(ctx context.Context, first bool, yield func(*imageio.Raw) bool) bool {
	for _, file := range b.scanned.Darks {
		list, err := imageio.ReadDark(ctx, b.root, file)
		if err != nil && first {
			b.scanned.Strays = append(b.scanned.Strays, imageio.Stray{Path: file.Path, Reason: "not used as dark: " + err.Error()})
		}
		for _, frame := range list {
			raw := &imageio.Raw{Digest: imageio.Digest(frame)}
			raw.Frames[imageio.Dark] = frame
			if first {
				b.darks = append(b.darks, raw.Digest)
			}
			if !yield(raw) {
				return false
			}
		}
	}
	return true
}

// region returns the region that a person drew and that is in force for a shot.
func (b *batch) region(shot string) *ledger.Region {
	if g, ok := ledger.RegionFor(b.regions, shot); ok {
		return &g
	}
	return nil
}

// currency returns what the row of shot i depends on now.
func (b *batch) currency(i int) ledger.Currency {
	s := &b.shots[i]
	return ledger.Currency{
		Frames:    s.frames,
		Settings:  settingsDigest(b.settings, b.region(s.Name)),
		Analysis:  Analysis,
		Reference: b.reference,
	}
}

// current reports whether a row of shot i holds.
func (b *batch) current(i int, r *ledger.Row) bool {
	return !r.Provisional && r.Currency.Same(b.currency(i))
}
