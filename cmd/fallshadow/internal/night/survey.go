package night

import (
	"context"
	"crypto/sha256"
	"fmt"
	"io"
	"os"
	"path/filepath"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/imageio"
)

// shot is a shot of the frozen list and what a first look at its frames told.
type shot struct {
	imageio.Shot
	content ledger.Digest    // zero: not even the bytes could be read
	sum     uint64           // of the frames, to see whether they are the same when read again
	frames  ledger.Digest    // content and metadata
	lights  [3]ledger.Digest // dark, dark of the light frame, light
	meta    imageio.Metadata
	size    [2]int
	err     error // why the frames cannot be used
}

// read reads the frames of a shot for the first time.
func (b *batch) read(ctx context.Context, s imageio.Shot) (raw *imageio.Raw, err error) {
	defer caught(&err)
	return imageio.Read(ctx, b.root, s, b.layout)
}

// load reads a readable shot again.
func (b *batch) load(ctx context.Context, at int) (raw *imageio.Raw, err error) {
	defer caught(&err)
	s := &b.shots[b.readable[at]]
	raw, err = imageio.ReadAgain(ctx, b.root, s.Shot, b.layout)
	if err != nil {
		return nil, err
	}
	if raw.Digest = s.content; raw.Sum() != s.sum {
		return nil, fmt.Errorf("%s was changed while this ran: run batch again", s.Name)
	}
	return raw, nil
}

// look reads a shot and notes what there is to know of it; the frames are nil where they
// cannot be read.
func (b *batch) look(ctx context.Context, s imageio.Shot) (shot, *imageio.Raw) {
	raw, err := b.read(ctx, s)
	if err != nil {
		content := bytesDigest(b.root, s)
		return shot{Shot: s, content: content, frames: framesDigest(content, s.Meta), meta: s.Meta, err: err}, nil
	}
	seen := shot{Shot: s, content: raw.Digest, sum: raw.Sum(), frames: framesDigest(raw.Digest, raw.Meta), meta: raw.Meta}
	seen.lights = [...]ledger.Digest{raw.Digests[imageio.Dark], raw.Digests[imageio.DarkOfLight], raw.Digests[imageio.Light]}
	for _, f := range raw.Frames {
		if f != nil {
			seen.size = [2]int{f.Width, f.Height}
		}
	}
	return seen, raw
}

// bytesDigest makes the content of a shot whose frames cannot be read: the SHA-256 of the
// bytes of its files with their roles. It is zero where a file cannot be read at all.
func bytesDigest(dir string, s imageio.Shot) ledger.Digest {
	h := sha256.New()
	io.WriteString(h, "bytes")
	for _, file := range s.Files {
		f, err := os.Open(filepath.Join(dir, filepath.FromSlash(file.Path)))
		if err != nil {
			return ledger.Digest{}
		}
		fmt.Fprintf(h, "\x00%d\x00", file.Role)
		n, err := io.Copy(h, f)
		f.Close()
		if err != nil {
			return ledger.Digest{}
		}
		fmt.Fprintf(h, "\x00%d", n)
	}
	return ledger.Digest(h.Sum(nil))
}

// files returns the paths of the files of a shot.
func files(s imageio.Shot) []string {
	var paths []string
	for _, f := range s.Files {
		paths = append(paths, f.Path)
	}
	return paths
}
