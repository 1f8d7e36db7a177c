package ledger

import (
	"strings"
	"testing"

	"golang.org/x/sys/unix"
)

// Lines as proc_pid_mountinfo(5) describes them.
const mounts = `36 35 98:0 /mnt1 /mnt2 rw,noatime master:1 - ext3 /dev/root rw,errors=continue
40 35 0:50 / /media/share rw,nosuid,nodev,relatime shared:30 - fuse.sshfs host:/data rw,user_id=0
41 35 0:51 / /media/usb rw - fuse.ntfs-3g /dev/sdb1 rw
42 35 0:52 / /media/odd rw master:1 shared:2 - fuse.rclone remote: rw
short
`

func TestFuseKind(t *testing.T) {
	for device, want := range map[string]string{"98:0": "", "0:50": "fuse.sshfs", "0:51": "", "0:52": "fuse.rclone", "9:9": ""} {
		if got := fuseKind(strings.NewReader(mounts), device); got != want {
			t.Errorf("device %s is %q, want %q", device, got, want)
		}
	}
}

func TestNetworkRefusal(t *testing.T) {
	dir := t.TempDir()
	if err := refuseNetwork(dir + "/not/there/yet"); err != nil {
		t.Errorf("a local folder: %v", err)
	}
	// The file system of the folder plays a network share.
	kind := magicOf(t, dir)
	networkMagic[kind] = "played share"
	defer delete(networkMagic, kind)
	err := refuseNetwork(dir + "/not/there/yet")
	if err == nil || !strings.Contains(err.Error(), "played share") || !strings.Contains(err.Error(), "--out") {
		t.Errorf("a network share: %v", err)
	}
}

// The numbers are those of the system's own header, and those of GPFS its letters.
func TestNetworkNumbers(t *testing.T) {
	for magic, want := range map[uint32]string{
		unix.NFS_SUPER_MAGIC: "nfs", unix.SMB_SUPER_MAGIC: "smb", unix.CIFS_SUPER_MAGIC: "cifs", unix.SMB2_SUPER_MAGIC: "smb2",
		unix.AFS_SUPER_MAGIC: "afs", unix.AFS_FS_MAGIC: "afs", unix.CEPH_SUPER_MAGIC: "ceph", unix.CODA_SUPER_MAGIC: "coda",
		unix.NCP_SUPER_MAGIC: "ncp", unix.OCFS2_SUPER_MAGIC: "ocfs2", unix.V9FS_MAGIC: "9p",
		'G'<<24 | 'P'<<16 | 'F'<<8 | 'S': "gpfs", 0x19830326: "beegfs",
		unix.EXT4_SUPER_MAGIC: "", unix.BTRFS_SUPER_MAGIC: "", unix.XFS_SUPER_MAGIC: "", unix.TMPFS_MAGIC: "", unix.OVERLAYFS_SUPER_MAGIC: "",
	} {
		if got := networkMagic[magic]; got != want {
			t.Errorf("%#x is %q, want %q", magic, got, want)
		}
	}
}

func magicOf(t *testing.T, dir string) uint32 {
	t.Helper()
	var fs unix.Statfs_t
	if err := unix.Statfs(dir, &fs); err != nil {
		t.Fatal(err)
	}
	if name, known := networkMagic[uint32(fs.Type)]; known {
		t.Skipf("the test runs on %s", name)
	}
	return uint32(fs.Type)
}
