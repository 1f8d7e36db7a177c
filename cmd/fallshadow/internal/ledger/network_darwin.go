package ledger

import "golang.org/x/sys/unix"

// networkKind returns the type of the file system of dir where the system does not call
// it local.
func networkKind(dir string) (string, error) {
	var fs unix.Statfs_t
	if err := unix.Statfs(dir, &fs); err != nil {
		return "", err
	}
	if fs.Flags&unix.MNT_LOCAL != 0 {
		return "", nil
	}
	return unix.ByteSliceToString(fs.Fstypename[:]), nil
}
