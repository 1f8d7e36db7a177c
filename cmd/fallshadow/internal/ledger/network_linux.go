package ledger

import (
	"bufio"
	"fmt"
	"io"
	"os"
	"strings"

	"golang.org/x/sys/unix"
)

// networkMagic names the network file systems by the number that statfs(2) gives
// (linux/magic.h and statfs(2), "f_type"; those of other makers as in the table of coreutils'
// stat). 9p is the share between a virtual machine and its host.
var networkMagic = map[uint32]string{
	0x00006969: "nfs",
	0x0000517b: "smb",
	0xff534d42: "cifs",
	0xfe534d42: "smb2",
	0x5346414f: "afs",
	0x00c36400: "ceph",
	0x73757245: "coda",
	0x0bd00bd0: "lustre",
	0x0000564c: "ncp",
	0x01161970: "gfs2",
	0x7461636f: "ocfs2",
	0x20030528: "orangefs",
	0x01021997: "9p",
	0x6b414653: "afs",
	0x47504653: "gpfs",
	0x19830326: "beegfs",
	0xaad7aaea: "panfs",
}

// fuseMagic covers local and remote file systems alike; the mount table tells which.
const fuseMagic = 0x65735546

// networkFuse are the FUSE file systems behind which there is a network.
var networkFuse = []string{"fuse.sshfs", "fuse.rclone", "fuse.s3fs", "fuse.glusterfs", "fuse.davfs", "fuse.cephfs", "fuse.juicefs", "fuse.smbnetfs", "fuse.goofys", "fuse.gcsfuse"}

// networkKind returns the name of the network file system that dir lies on, or "".
func networkKind(dir string) (string, error) {
	var fs unix.Statfs_t
	if err := unix.Statfs(dir, &fs); err != nil {
		return "", err
	}
	magic := uint32(fs.Type)
	if magic != fuseMagic {
		return networkMagic[magic], nil
	}
	var st unix.Stat_t
	if err := unix.Stat(dir, &st); err != nil {
		return "", err
	}
	mounts, err := os.Open("/proc/self/mountinfo")
	if err != nil {
		return "", nil // no mount table, no proof
	}
	defer mounts.Close()
	return fuseKind(mounts, fmt.Sprintf("%d:%d", unix.Major(st.Dev), unix.Minor(st.Dev))), nil
}

// fuseKind looks the device up in a mount table (proc_pid_mountinfo(5): field 3 is
// major:minor, the type is the first field after the lone "-").
func fuseKind(mounts io.Reader, device string) string {
	for lines := bufio.NewScanner(mounts); lines.Scan(); {
		left, right, _ := strings.Cut(lines.Text(), " - ")
		fields, kind := strings.Fields(left), strings.Fields(right)
		if len(fields) < 3 || len(kind) == 0 || fields[2] != device {
			continue
		}
		for _, known := range networkFuse {
			if kind[0] == known {
				return known
			}
		}
	}
	return ""
}
