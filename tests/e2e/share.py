"""A folder on a network share, as far as a service can tell: a file system of its own (FUSE, spoken directly by the
protocol of linux/fuse.h) that shows the files of another folder, read-only. When this process is stopped the share
hangs; when it is killed the share is broken. Run as: share.py MOUNTPOINT FOLDER; prints a line once it is mounted."""
import ctypes
import errno
import os
import struct
import sys

LOOKUP, FORGET, GETATTR, OPEN, READ, RELEASE, FLUSH, INIT = 1, 2, 3, 14, 15, 18, 25, 26
OPENDIR, READDIR, RELEASEDIR, INTERRUPT, BATCH_FORGET = 27, 28, 29, 36, 42
CHANGES = {4, 6, 8, 9, 10, 11, 12, 13, 16, 35, 45}  # what a read-only file system refuses
ROOT = 1
MS_NOSUID_NODEV = 2 | 4


class Share:
    def __init__(self, mountpoint, folder):
        self.folder = folder
        self.names = {ROOT: b""}  # by node
        self.device = os.open("/dev/fuse", os.O_RDWR)
        libc = ctypes.CDLL(None, use_errno=True)
        options = f"fd={self.device},rootmode=40000,user_id={os.getuid()},group_id={os.getgid()},allow_other".encode()
        if libc.mount(b"share", os.fsencode(mountpoint), b"fuse", MS_NOSUID_NODEV, options) != 0:
            raise OSError(ctypes.get_errno(), "mount")

    def path(self, node):
        return os.path.join(os.fsencode(self.folder), self.names[node])

    def attributes(self, node):
        s = os.stat(self.path(node))
        parts = [divmod(t, 10**9) for t in (s.st_atime_ns, s.st_mtime_ns, s.st_ctime_ns)]
        return struct.pack("<6Q10I", node, s.st_size, s.st_blocks, *(p[0] for p in parts), *(p[1] for p in parts),
                           s.st_mode, s.st_nlink, s.st_uid, s.st_gid, 0, 4096, 0)

    def node_of(self, name):
        for node, known in self.names.items():
            if known == name:
                return node
        node = len(self.names) + 1
        self.names[node] = name
        return node

    def listing(self, offset, size):
        entries = b""
        for i, name in enumerate(sorted(os.listdir(os.fsencode(self.folder)))[offset:], offset + 1):
            entry = struct.pack("<QQII", i + 1, i, len(name), 0) + name
            entry += b"\0" * (-len(entry) % 8)
            if len(entries) + len(entry) > size:
                break
            entries += entry
        return entries

    def answer(self, opcode, node, body):
        if opcode == INIT:
            return struct.pack("<IIIIII", 7, 22, 65536, 0, 0, 65536)
        if opcode == LOOKUP:
            name = body[:-1]
            if not os.path.exists(os.path.join(os.fsencode(self.folder), name)):
                raise OSError(errno.ENOENT, "lookup")
            found = self.node_of(name)
            return struct.pack("<4QII", found, 0, 0, 0, 0, 0) + self.attributes(found)
        if opcode == GETATTR:
            return struct.pack("<QII", 0, 0, 0) + self.attributes(node)
        if opcode in (OPEN, OPENDIR):
            return struct.pack("<QII", 0, 0, 0)
        if opcode == READDIR:
            return self.listing(*struct.unpack_from("<QI", body, 8))
        if opcode == READ:
            offset, size = struct.unpack_from("<QI", body, 8)
            with open(self.path(node), "rb") as file:
                return os.pread(file.fileno(), size, offset)
        if opcode in (RELEASE, RELEASEDIR, FLUSH):
            return b""
        raise OSError(errno.EROFS if opcode in CHANGES else errno.ENOSYS, "not here")

    def serve(self):
        while True:
            try:
                request = os.read(self.device, 1 << 20)
            except OSError as error:
                if error.errno in (errno.EINTR, errno.ENOENT):
                    continue
                return  # unmounted
            _, opcode, unique, node = struct.unpack_from("<IIQQ", request)
            if opcode in (FORGET, BATCH_FORGET, INTERRUPT):
                continue
            try:
                body, failure = self.answer(opcode, node, request[40:]), 0
            except OSError as error:
                body, failure = b"", -(error.errno or errno.EIO)
            try:
                os.write(self.device, struct.pack("<IiQ", 16 + len(body), failure, unique) + body)
            except OSError:
                pass  # who asked is gone


if __name__ == "__main__":
    share = Share(*sys.argv[1:3])
    print("mounted", flush=True)
    share.serve()
