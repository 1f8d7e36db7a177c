package imageio

import (
	"bytes"
	"path"
	"strings"
	"unicode/utf8"
)

// Format is the type of a file by its content.
type Format string

// The formats that are told apart. Those that are read are FITS, Gzip (around FITS),
// TIFF, PNG, NPY and NPZ.
const (
	FITS    Format = "FITS"
	Gzip    Format = "gzip"
	TIFF    Format = "TIFF"
	BigTIFF Format = "BigTIFF"
	PNG     Format = "PNG"
	NPY     Format = "NPY"
	NPZ     Format = "NPZ"
	HDF5    Format = "HDF5"
	JPEG    Format = "JPEG"
	BMP     Format = "BMP"
	Empty   Format = "empty"
	Zeros   Format = "zeros" // a file whose room was made before its content
	Text    Format = "text"
	Unknown Format = "unknown"
)

// sniffLength is how much of the start of a file Sniff wants to see.
const sniffLength = 512

var signatures = []struct {
	start  string
	format Format
}{
	{"SIMPLE  =", FITS},
	{"\x1f\x8b", Gzip},
	{"II*\x00", TIFF},
	{"MM\x00*", TIFF},
	{"II+\x00", BigTIFF},
	{"MM\x00+", BigTIFF},
	{"\x89PNG\r\n\x1a\n", PNG},
	{"\x93NUMPY", NPY},
	{"PK\x03\x04", NPZ},
	{"PK\x05\x06", NPZ},
	{"\x89HDF\r\n\x1a\n", HDF5},
	{"\xff\xd8\xff", JPEG},
	{"BM", BMP},
}

// Sniff tells the format of a file from its first bytes (512 are enough), whatever its
// name. A file cut inside its signature is Text or Unknown.
func Sniff(start []byte) Format {
	if len(start) == 0 {
		return Empty
	}
	for _, s := range signatures {
		if bytes.HasPrefix(start, []byte(s.start)) {
			return s.format
		}
	}
	if len(bytes.Trim(start, "\x00")) == 0 {
		return Zeros
	}
	if text(start) {
		return Text
	}
	return Unknown
}

// readable reports whether files of the format may hold frames for this package.
func (f Format) readable() bool {
	switch f {
	case FITS, Gzip, TIFF, PNG, NPY, NPZ:
		return true
	}
	return false
}

func text(b []byte) bool {
	for len(b) > 0 {
		r, n := utf8.DecodeRune(b)
		if r == utf8.RuneError && n == 1 && len(b) >= utf8.UTFMax || r < ' ' && !strings.ContainsRune("\t\r\n\f", r) {
			return false
		}
		b = b[n:]
	}
	return true
}

// endings are those by which a file claims to hold frames: such a file is a shot even if
// its content is not readable, so that it gets its row and reason.
var endings = []string{".fits", ".fit", ".fts", ".tif", ".tiff", ".png", ".npy", ".npz"}

// ending returns the part of a path that names its format, ".gz" included.
func ending(file string) string {
	rest := file
	if e := path.Ext(rest); strings.EqualFold(e, ".gz") {
		rest = rest[:len(rest)-len(e)]
	}
	e := path.Ext(rest)
	for _, known := range endings {
		if strings.EqualFold(e, known) {
			return file[len(rest)-len(e):]
		}
	}
	return ""
}

// stem returns a path without its ending.
func stem(file string) string {
	e := ending(file)
	if e == "" {
		e = path.Ext(file)
	}
	return strings.TrimSuffix(file, e)
}
