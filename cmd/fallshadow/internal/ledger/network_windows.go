package ledger

import (
	"path/filepath"

	"golang.org/x/sys/windows"
)

// networkKind says whether the drive or share of dir is remote.
func networkKind(dir string) (string, error) {
	root, err := windows.UTF16PtrFromString(filepath.VolumeName(dir) + `\`)
	if err != nil {
		return "", err
	}
	if windows.GetDriveType(root) == windows.DRIVE_REMOTE {
		return "network drive", nil
	}
	return "", nil
}
