// Package imageio brings camera frames in and out: which files are one shot, what
// their pixels and metadata are, and what light the cloud would have seen. It knows
// nothing of atoms.
package imageio

// Role says what a frame of a shot shows.
type Role int

// The roles of a frame. DarkOfLight is the second dark of a four-frame shot, taken
// beside the light frame. Density is a ready density image with no raw frames.
const (
	Atoms Role = iota
	Light
	Dark
	DarkOfLight
	Density
	numRoles
)

// Frame is one picture, row by row from the top, in counts as the camera wrote them
// (after the file's own scaling). Float32 carries every 16-bit count exactly and a
// larger one to 6e-8, far below its shot noise. NonFinite counts the pixels that are not
// a number or infinite, which floating files may hold; they stay in Pix.
type Frame struct {
	Width, Height int
	Pix           []float32
	NonFinite     int
}

// Raw is a shot as read: frames by role, absent roles nil, all of one size.
type Raw struct {
	Frames [numRoles]*Frame
	Meta   Metadata
	// Digests are those of the frames by role, zero for absent ones; Digest is the SHA-256 of
	// them all in the order of their roles.
	Digests [numRoles][32]byte
	Digest  [32]byte
}

// Shot is one cycle of the machine as found in a night's folder. Name is its path in
// the night without ending, with forward slashes. Meta is what the name and the side
// table say. Problem is set when the shot cannot be read as it stands (a frame missing,
// two files of one name); such a shot still has a row.
type Shot struct {
	Name    string
	Files   []ShotFile
	Meta    Metadata
	Problem error
}

// ShotFile is one file of a shot: its path relative to the night's folder, with forward
// slashes, and the role it plays, or Unused when the planes or extensions inside decide.
type ShotFile struct {
	Path string
	Role Role
}
