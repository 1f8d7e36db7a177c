package simulate

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"sync"

	"fallshadow/cmd/fallshadow/internal/settings"
)

// ScenarioFile is the name under which a simulated night keeps its scenario.
const ScenarioFile = "simulated.toml"

const scenarioHead = "# This night was simulated by `fallshadow simulate` from this scenario and the\n" +
	"# settings beside it; " + TruthFile + " holds what the shots show.\n\n"

// Write draws the night into a new folder: the shots, the settings that read them, the
// scenario and the table of truths. All of it is written to a temporary folder beside
// dir, which is renamed when it is whole; a folder with anything in it is left alone. The
// bytes do not depend on workers. done, where not nil, is called after each shot, never
// from two goroutines at once.
func (n *Night) Write(ctx context.Context, dir string, workers int, done func()) (err error) {
	if err := vacantPlace(dir); err != nil {
		return err
	}
	parent := filepath.Dir(filepath.Clean(dir))
	if err := os.MkdirAll(parent, 0o755); err != nil {
		return fmt.Errorf("simulate: %w", err)
	}
	temp, err := os.MkdirTemp(parent, ".simulate-*.tmp")
	if err != nil {
		return fmt.Errorf("simulate: %w", err)
	}
	defer os.RemoveAll(temp)
	truths, err := n.writeShots(ctx, temp, workers, done)
	if err != nil {
		return err
	}
	if err := n.writePapers(temp, truths); err != nil {
		return err
	}
	return place(temp, dir)
}

// vacantPlace refuses a folder that holds anything.
func vacantPlace(dir string) error {
	entries, err := os.ReadDir(dir)
	switch {
	case errors.Is(err, os.ErrNotExist):
		return nil
	case err != nil:
		return fmt.Errorf("simulate: %w", err)
	case len(entries) > 0:
		return fmt.Errorf("simulate: %s is not empty; name a new folder, nothing is written over", dir)
	}
	return nil
}

// place renames the finished folder to its name.
func place(temp, dir string) error {
	if err := os.Chmod(temp, 0o755); err != nil {
		return fmt.Errorf("simulate: %w", err)
	}
	if err := os.Remove(dir); err != nil && !errors.Is(err, os.ErrNotExist) {
		return fmt.Errorf("simulate: %s was filled meanwhile: %w", dir, err)
	}
	if err := os.Rename(temp, dir); err != nil {
		return fmt.Errorf("simulate: %w", err)
	}
	return nil
}

// writeShots draws all shots by some workers; the first error stops them.
func (n *Night) writeShots(ctx context.Context, dir string, workers int, done func()) ([]Truth, error) {
	ctx, cancel := context.WithCancelCause(ctx)
	defer cancel(nil)
	truths := make([]Truth, n.Scenario.Shots)
	next := make(chan int)
	var group sync.WaitGroup
	var told sync.Mutex
	for range max(1, workers) {
		group.Go(func() {
			for i := range next {
				var err error
				if truths[i], err = n.writeShot(dir, i); err != nil {
					cancel(err)
					return
				}
				if done != nil {
					told.Lock()
					done()
					told.Unlock()
				}
			}
		})
	}
	for i := 0; i < len(truths) && ctx.Err() == nil; i++ {
		select {
		case next <- i:
		case <-ctx.Done():
		}
	}
	close(next)
	group.Wait()
	return truths, context.Cause(ctx)
}

func (n *Night) writeShot(dir string, i int) (Truth, error) {
	files, t, err := n.files(i)
	for _, f := range files {
		if err == nil {
			err = writeFile(filepath.Join(dir, filepath.FromSlash(f.path)), f.data)
		}
	}
	return t, err
}

// writePapers writes what stands beside the shots.
func (n *Night) writePapers(dir string, truths []Truth) error {
	truth, err := table(truths)
	if err != nil {
		return fmt.Errorf("simulate: table of truths: %w", err)
	}
	scenario, err := n.Scenario.TOML()
	if err != nil {
		return fmt.Errorf("simulate: scenario: %w", err)
	}
	return errors.Join(
		writeFile(filepath.Join(dir, TruthFile), truth),
		writeFile(filepath.Join(dir, ScenarioFile), append([]byte(scenarioHead), scenario...)),
		writeFile(filepath.Join(dir, settings.FileName), n.SettingsText),
	)
}

// writeFile writes a new file and syncs it.
func writeFile(path string, data []byte) error {
	if err := os.MkdirAll(filepath.Dir(path), 0o755); err != nil {
		return fmt.Errorf("simulate: %w", err)
	}
	f, err := os.OpenFile(path, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o644)
	if err != nil {
		return fmt.Errorf("simulate: %w", err)
	}
	_, err = f.Write(data)
	if err == nil {
		err = f.Sync()
	}
	if err = errors.Join(err, f.Close()); err != nil {
		return fmt.Errorf("simulate: %w", err)
	}
	return nil
}
