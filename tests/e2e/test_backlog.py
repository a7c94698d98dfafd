"""Much at once: many waiting files (AGREED_BACKLOG of them, 20,000 unless told otherwise; tests/bench takes 100,000), and
one file of 200 MB."""
import os
import statistics
import time
import unittest

from harness import SiteTest, wait_until
from plant import HEADER, START, rfc3339

FILES = int(os.environ.get("AGREED_BACKLOG", "20000"))
ROWS = 1_000_000  # of 200 bytes
MOST_MEMORY_MB = 64


def memory_mb(site, what):
    with open(f"/proc/{site.process.pid}/status") as status:
        return next(int(line.split()[1]) / 1024 for line in status if line.startswith(what))


class Backlog(SiteTest):
    def accepted(self, site):
        return site.get("/api/status")["intake"]["readings"]["accepted"]

    def test_many_files_that_wait_at_the_start(self):
        site = self.make_site()
        for i in range(FILES):
            (site.inbox("line1") / f"{i:06d}.csv").write_text(
                f"{HEADER}\ncheck,{rfc3339(START - 400 * 86400 + 60 * i)},protein,wheat-low,{10.6 + i % 7 / 100:.2f}\n")
        site.start(wait_ready=False)
        begun, times = time.monotonic(), []
        while self.accepted(site) < FILES:
            self.assertLess(time.monotonic() - begun, 600)
            asked = time.monotonic()
            site.get("/api/status")
            times.append(time.monotonic() - asked)
            time.sleep(0.05)
        site.wait_taken("the last is moved", seconds=120)
        times.sort()
        print(f"{FILES / (time.monotonic() - begun):,.0f} files/s; GET /api/status: median "
              f"{statistics.median(times) * 1e3:.1f} ms, 99th percentile {times[int(len(times) * 0.99)] * 1e3:.1f} ms")
        self.assertEqual(site.get("/api/status")["intake"]["files"], {"done": FILES, "repeated": 0, "rejected": 0})
        self.assertEqual(len(site.files_in("line1", "done")), FILES)
        self.assertLess(times[int(len(times) * 0.99)], 1.0, "the status answers meanwhile")

    def test_a_file_of_200_megabytes_in_bounded_memory(self):
        site = self.make_site().start()
        path = site.folder / "large.csv"
        with open(path, "w") as out:
            out.write(HEADER + ",note\n")
            for i in range(ROWS):
                out.write(f"check,{rfc3339(START - 400 * 86400 + 30 * i)},protein,wheat-low,{10.6 + i % 7 / 100:.2f},{i:0145d}\n")
        self.assertGreater(path.stat().st_size, 200_000_000)
        path.rename(site.inbox("line1") / "large.csv")
        wait_until(lambda: self.accepted(site) == ROWS, "all rows are taken in", seconds=600)
        site.wait_taken()
        peak = memory_mb(site, "VmHWM")
        print(f"resident at most {peak:.1f} MB")
        self.assertLess(peak, MOST_MEMORY_MB)


if __name__ == "__main__":
    unittest.main()
