package night

import (
	"crypto/sha256"
	"encoding/binary"
	"fmt"
	"hash"
	"maps"
	"slices"

	"fallshadow/cmd/fallshadow/internal/ledger"
	"fallshadow/imageio"
)

// Analysis is raised by hand when a change of the program may change numbers; rows of
// another number are not current.
const Analysis = 1

// framesDigest joins the content of a shot with its metadata.
func framesDigest(content ledger.Digest, meta imageio.Metadata) ledger.Digest {
	if content == (ledger.Digest{}) {
		return content
	}
	h := sha256.New()
	h.Write(content[:])
	for _, key := range slices.Sorted(maps.Keys(meta)) {
		writeText(h, key)
		writeText(h, meta[key])
	}
	return ledger.Digest(h.Sum(nil))
}

// writeText hashes a text so that two texts cannot run into one another.
func writeText(h hash.Hash, text string) {
	h.Write(binary.LittleEndian.AppendUint64(nil, uint64(len(text))))
	h.Write([]byte(text))
}

// settingsDigest joins the settings with the region that is in force for a shot, if a
// person drew one.
func settingsDigest(settings ledger.Digest, region *ledger.Region) ledger.Digest {
	if region == nil {
		return settings
	}
	h := sha256.New()
	h.Write(settings[:])
	fmt.Fprintf(h, "%d %d %d %d", region.X0, region.Y0, region.X1, region.Y1)
	return ledger.Digest(h.Sum(nil))
}

// referenceDigest covers the light and dark frames that the numbers of any shot may
// depend on: those of all readable shots in order, and the night's own darks. The master
// dark, the bad pixels and a measured gain follow from all of them, so that a new shot
// leaves no row current; the nearest light frames are among them.
func referenceDigest(shots []shot, darks []ledger.Digest) ledger.Digest {
	h := sha256.New()
	for _, s := range shots {
		if s.err == nil {
			fmt.Fprintf(h, "%d %d ", s.size[0], s.size[1])
			for _, d := range s.lights {
				h.Write(d[:])
			}
		}
	}
	h.Write([]byte("darks"))
	for _, d := range darks {
		h.Write(d[:])
	}
	return ledger.Digest(h.Sum(nil))
}
