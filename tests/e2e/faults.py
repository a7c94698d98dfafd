"""Steers tests/support/faults, preloaded into the real service: which call fails, or kills it; how far ahead its clock is."""
import mmap
import os
import pathlib
import struct

LIBRARY = os.environ.get("AGREED_FAULTY_CALLS", str(
    pathlib.Path(__file__).resolve().parents[2] / "build" / "tests" / "support" / "faults" / "libagreed_faulty_calls.so"))

WRITE, SYNC, RENAME, OPEN, CREATE, FOLDER, UNLINK, READ, SEND = (1 << i for i in range(9))
COUNT, FAIL_ONCE, FAIL_FROM_THERE_ON, KILL = range(4)
NAMES = {WRITE: "write", SYNC: "sync", RENAME: "rename", OPEN: "open", CREATE: "create", FOLDER: "folder", UNLINK: "unlink",
         READ: "read", SEND: "send"}


def preloaded():
    # A sanitizer's run-time library wants to be the first one.
    asan = os.environ.get("ASAN_OPTIONS", "")
    return {"LD_PRELOAD": LIBRARY, "ASAN_OPTIONS": ":".join(filter(None, [asan, "verify_asan_link_order=0"]))}


def set_clock_ahead(site, seconds):
    """From the site's next start on."""
    site.environment = {**site.environment, **preloaded(), "AGREED_CLOCK_AHEAD": str(int(seconds))}


class Faults:
    """The shared file of one site. Calls count from `arm` on."""

    def __init__(self, site):
        file = site.folder / "faults"
        file.write_bytes(bytes(256))
        self.file = open(file, "r+b")
        self.memory = mmap.mmap(self.file.fileno(), 256)
        site.environment = {**preloaded(), "AGREED_FAULTS": str(file), "AGREED_FAULTS_BELOW": f"{site.folder}/"}

    def arm(self, kinds, action, target=0, error=0):
        struct.pack_into("<I", self.memory, 0, 0)
        self.memory[4:256] = struct.pack("<IIIiII", kinds, action, target, error, 0, 0) + bytes(228)
        struct.pack_into("<I", self.memory, 0, 1)

    def disarm(self):
        struct.pack_into("<I", self.memory, 0, 0)

    def count(self, kind):
        """How many calls of one kind there were since `arm`."""
        return struct.unpack_from("<I", self.memory, 28 + 4 * (kind.bit_length() - 1))[0]

    @property
    def hits(self):
        return struct.unpack_from("<I", self.memory, 24)[0]

    @property
    def hit(self):
        """The call that was hit, with its file."""
        return self.memory[64:256].split(b"\0")[0].decode(errors="replace")

    def close(self):
        self.memory.close()
        self.file.close()


def spread(count, most):
    """1..count, or `most` of them spread evenly, the first and the last among them."""
    if count <= most:
        return list(range(1, count + 1))
    return sorted({round(1 + i * (count - 1) / (most - 1)) for i in range(most)})
