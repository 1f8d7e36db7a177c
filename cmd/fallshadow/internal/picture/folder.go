package picture

import (
	"bytes"
	"crypto/sha256"
	"encoding/binary"
	"encoding/hex"
	"fmt"
	"hash/crc32"
	"io"
	"os"
	"path/filepath"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/cmd/fallshadow/internal/report"
)

// Folder holds the sheets of the shots of a night, under the names of the shots.
type Folder struct{ Dir string }

// Has reports whether the sheet of a row is there and was drawn from what the row stands
// for.
func (f Folder) Has(r *ledger.Row) bool {
	file, err := f.file(r.Shot)
	if err != nil {
		return false
	}
	in, err := os.Open(file)
	if err != nil {
		return false
	}
	defer in.Close()
	want := mark(r)
	start := make([]byte, headLength+len(want))
	_, err = io.ReadFull(in, start)
	return err == nil && bytes.Equal(start[headLength:], want)
}

// Draw writes the sheet of a row whose facts hold maps, whole or not at all.
func (f Folder) Draw(r *ledger.Row, facts *report.Facts) error {
	v := New(facts)
	if v == nil {
		return nil
	}
	file, err := f.file(r.Shot)
	if err != nil {
		return err
	}
	data, err := PNG(Sheet(r, v))
	if err == nil {
		err = os.MkdirAll(filepath.Dir(file), 0o755)
	}
	if err == nil {
		err = replace(file, append(append(bytes.Clone(data[:headLength]), mark(r)...), data[headLength:]...))
	}
	if err != nil {
		return fmt.Errorf("write the picture of %s: %w", r.Shot, err)
	}
	return nil
}

// file is the path of a sheet.
func (f Folder) file(shot string) (string, error) {
	name := filepath.FromSlash(shot) + ".png"
	if !filepath.IsLocal(name) {
		return "", fmt.Errorf("the shot %q has no name for a file", shot)
	}
	return filepath.Join(f.Dir, name), nil
}

// headLength is where the first chunk of a PNG ends, its header (PNG specification,
// section 5).
const headLength = 8 + 12 + 13

// mark is a text chunk (PNG specification, section 11.3.3.2) that tells from what a sheet
// was drawn.
func mark(r *ledger.Row) []byte {
	h := sha256.New()
	c := r.Currency
	fmt.Fprintf(h, "%s %s %s %s %d", r.Shot, c.Frames, c.Settings, c.Reference, c.Analysis)
	body := "tEXtSource\x00" + hex.EncodeToString(h.Sum(nil))
	chunk := binary.BigEndian.AppendUint32(nil, uint32(len(body)-4))
	chunk = append(chunk, body...)
	return binary.BigEndian.AppendUint32(chunk, crc32.ChecksumIEEE([]byte(body)))
}

// replace writes a file under a temporary name and renames it.
func replace(file string, data []byte) error {
	temporary := file + ".tmp"
	err := os.WriteFile(temporary, data, 0o644)
	if err == nil {
		err = os.Rename(temporary, file)
	}
	if err != nil {
		os.Remove(temporary)
	}
	return err
}
