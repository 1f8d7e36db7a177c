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
// larger one to 6e-8, far below its shot noise.
type Frame struct {
	Width, Height int
	Pix           []float32
}

// Metadata is what came with a shot: header cards, parts of the file name, cells of
// a side table. Numbers keep the text they were written with.
type Metadata map[string]string

// Raw is a shot as read: frames by role, absent roles nil, all of one size.
type Raw struct {
	Frames [numRoles]*Frame
	Meta   Metadata
	// Digest is the SHA-256 of the frames' sizes and pixels in the order of their roles.
	Digest [32]byte
}

// Shot is one cycle of the machine as found in a night's folder. Name is its path in
// the night without ending, with forward slashes. Problem is set when the shot cannot
// be read as it stands (a frame missing, two layouts mixed); such a shot still has a row.
type Shot struct {
	Name    string
	Files   []ShotFile
	Problem error
}

// ShotFile is one file of a shot: its path relative to the night's folder and the role
// it plays, or -1 when the planes or extensions inside decide.
type ShotFile struct {
	Path string
	Role Role
}

// Layout says what makes a shot.
type Layout struct {
	// Kind is "cube" (one file, planes of one array), "extensions" (one file, image
	// extensions), "files" (one file a frame) or "density" (one file with a density image).
	Kind string
	// Planes is the order of the frames in a cube or in the extensions, such as
	// atoms, light, dark; two frames take the dark from the night.
	Planes []Role
	// Suffix gives, for Kind "files", the end of the file name before its ending, by role
	// ("_atoms"); or a folder name where it ends in "/".
	Suffix map[Role]string
	// Pattern, where set, is a regular expression over the path in the night; its named
	// groups become metadata and files that do not match are not shots.
	Pattern string
}
