package imageio

import (
	"fmt"
	"slices"
	"strings"
)

// Unused, as a role in Layout.Planes, skips a plane. In ShotFile it says that the planes
// or extensions inside the file have the roles.
const Unused Role = -1

// roleNames are the names of the roles in settings and messages, in their order.
var roleNames = [numRoles]string{"atoms", "light", "dark", "dark_of_light", "density"}

func (r Role) String() string {
	if r < 0 || r >= numRoles {
		return "unused"
	}
	return roleNames[r]
}

// ParseRole is the inverse of Role.String. It fails on any other name, and names those
// that there are.
func ParseRole(name string) (Role, error) {
	if name == Unused.String() {
		return Unused, nil
	}
	if i := slices.Index(roleNames[:], name); i >= 0 {
		return Role(i), nil
	}
	return 0, fmt.Errorf("%q is no role of a frame: write %s or unused", name, strings.Join(roleNames[:], ", "))
}
