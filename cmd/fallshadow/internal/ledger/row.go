package ledger

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"math"
)

// Digest is a SHA-256. The zero Digest stands for what could not be read; it equals
// nothing, not even itself (see Same).
type Digest [sha256.Size]byte

// Same reports whether both digests are known and equal.
func (d Digest) Same(e Digest) bool { return d == e && d != Digest{} }

// String returns the digest in hexadecimal digits.
func (d Digest) String() string { return hex.EncodeToString(d[:]) }

// Currency is all that the numbers of a row depend on. A row is current when its
// Currency is that of the shot, the settings and the program of now.
type Currency struct {
	Frames    Digest // pixels and metadata of the shot
	Settings  Digest // effective settings, region overrides included
	Analysis  int    // raised by hand when numbers may change
	Reference Digest // the light and dark frames used, in order
}

// Same reports whether both are known and equal.
func (c Currency) Same(d Currency) bool {
	return c.Frames.Same(d.Frames) && c.Settings.Same(d.Settings) &&
		c.Analysis == d.Analysis && c.Reference.Same(d.Reference)
}

// Shift is the change of numbers, by the names and in the SI units of package numbers,
// when one calibration moves up by one standard deviation. The signs keep the correlation
// of calibration errors between numbers and over the shots of a night.
type Shift struct {
	Known  bool               `json:"known"` // somebody stated the uncertainty
	Change map[string]float64 `json:"change"`
}

// Row is what the ledger knows of a shot.
type Row struct {
	Shot        string   // its path in the night
	Files       []string // relative to the night, forward slashes
	Content     Digest   // by which the shot is known whatever its name
	Currency    Currency
	Provisional bool   // written by watch; the next batch makes it final
	Reason      string // why the shot failed; empty when it did not
	Flags       []string
	Meta        map[string]string // as read with the frames
	// Numbers and Words are the cells of the table by column name; a cell that is
	// empty is absent. Numbers are finite.
	Numbers map[string]float64
	Words   map[string]string
	// Shifts tells by how much each calibration moves the numbers, by its name.
	Shifts map[string]Shift

	// The rest is found when rows are read and is not stored with the row.

	Duplicate string // the first shot in natural order with the same pixels, if not this one
	Bad       string // a person's word against the shot
	Stale     bool   // set by who knows what is current now
}

// Number returns a cell, NaN where it is empty.
func (r *Row) Number(column string) float64 {
	if v, ok := r.Numbers[column]; ok {
		return v
	}
	return math.NaN()
}

// SetNumber fills a cell; a number that is not finite leaves it empty.
func (r *Row) SetNumber(column string, v float64) {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return
	}
	if r.Numbers == nil {
		r.Numbers = map[string]float64{}
	}
	r.Numbers[column] = v
}

// SetWord fills a cell; an empty word leaves it empty.
func (r *Row) SetWord(column, word string) {
	if word == "" {
		return
	}
	if r.Words == nil {
		r.Words = map[string]string{}
	}
	r.Words[column] = word
}

// markDuplicates fills Duplicate in rows that stand in natural order.
func markDuplicates(rows []Row) {
	first := make(map[Digest]string, len(rows))
	for i := range rows {
		r := &rows[i]
		if r.Content == (Digest{}) {
			continue
		}
		if name, seen := first[r.Content]; seen {
			r.Duplicate = name
		} else {
			first[r.Content] = r.Shot
		}
	}
}

func digestFrom(b []byte) (d Digest) {
	copy(d[:], b)
	return d
}

// blob returns the digest for storage, nothing for the zero one.
func (d Digest) blob() []byte {
	if bytes.Equal(d[:], make([]byte, len(d))) {
		return nil
	}
	return d[:]
}
