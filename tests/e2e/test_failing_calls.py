"""The n-th write, sync, rename, open, ... of a file's life fails, once or from then on until the cause goes: nothing is lost,
nothing doubled, the service says it and goes on by itself.

AGREED_STEPS=all tries every n; without it a few spread over all of them."""
import errno
import os
import threading
import unittest

import faults
from faults import COUNT, CREATE, FAIL_FROM_THERE_ON, FAIL_ONCE, FOLDER, OPEN, READ, RENAME, SYNC, UNLINK, WRITE, Faults, spread
from harness import SiteTest, wait_until
from outcome import all_delivered, check_deliveries, check_same, journal_rows, outcome
from plant import START, csv, rfc3339

MOST = 10_000 if os.environ.get("AGREED_STEPS") == "all" else 5
ERRORS = {WRITE: (errno.EIO, errno.ENOSPC), SYNC: (errno.EIO, errno.ENOSPC), CREATE: (errno.EIO, errno.ENOSPC),
          FOLDER: (errno.EIO, errno.ENOSPC), RENAME: (errno.EIO, errno.ENOSPC), OPEN: (errno.EIO,), READ: (errno.EIO,),
          UNLINK: (errno.EIO,)}


def rows(i):
    """A file with good rows, a repeated, a conflicting and a bad one."""
    def check(k, value, standard="wheat-low"):
        return ("check", rfc3339(START + k * 60), "protein", standard, value)
    good = [check(i * 8 + k, round(10.6 + 0.01 * ((i * 7 + k * 3) % 5 - 2), 2)) for k in range(8)]
    return good + ([check(i * 8 - 1, 12.5), check(i * 8 - 8, good[0][4]), ("check", "never", "protein", "wheat-low", 1)] if i % 2 else [])


class FailingCalls(SiteTest):
    told = 0

    def begin(self, analyzer):
        receiver = self.make_receiver()
        site = self.make_site(receiver_port=receiver.port)
        calls = Faults(site)
        self.addCleanup(calls.close)
        return site.start(), receiver, calls

    def gone(self, site, i):
        return not (site.inbox("line1") / f"{i:04d}.csv").exists()

    def drop(self, site, i):
        site.drop("line1", f"{i:04d}.csv", csv(rows(i)))

    def logged(self, site, since):
        """What the log has said of trouble from byte `since` on."""
        with open(site.folder / "log", "rb") as log:
            log.seek(since)
            return [line for line in log.read().decode(errors="replace").splitlines() if " warning " in line or " error " in line]

    def says(self, site, calls, since):
        """The log has it, and of the journal also /health/ready."""
        lines = self.logged(site, since)
        if not lines or "/state/" not in calls.hit:
            return lines
        status, _, body = site.request("/health/ready")
        return status == 503 and b"journal" in body

    def one(self, site, calls, i, kind, n, error, action):
        since = (site.folder / "log").stat().st_size
        calls.arm(kind, action, n, error)
        self.drop(site, i)
        wait_until(lambda: calls.hits or self.gone(site, i), "a call fails, or the file is taken in without so many")
        if calls.hits and action == FAIL_FROM_THERE_ON:
            # Not every call matters to the end: reading a folder again, or a checkpoint, may wait for better times.
            wait_until(lambda: self.says(site, calls, since) or self.gone(site, i), f"it says that {calls.hit} failed")
            self.told += not self.gone(site, i)
        calls.disarm()
        wait_until(lambda: self.gone(site, i), f"the file is moved after {calls.hit} failed")
        wait_until(lambda: site.status_code("/health/ready") == 200, f"it is ready after {calls.hit} failed")
        return calls.hits > 0

    def calls_in_a_life(self, site, calls, i):
        calls.arm(0, COUNT)
        self.drop(site, i)
        wait_until(lambda: self.gone(site, i), "the file is taken in")
        wait_until(lambda: all_delivered(site), "all is delivered")
        calls.disarm()
        return {kind: calls.count(kind) for kind in ERRORS}

    def part(self, kinds, results):
        """All of `kinds` on one site, file after file."""
        site, receiver, calls = self.begin("line1")
        self.drop(site, 0)
        wait_until(lambda: self.gone(site, 0), "the first file is taken in")
        hits, i, totals = 0, 1, self.calls_in_a_life(site, calls, 1)
        for kind in kinds:
            total = totals[kind]
            for action in (FAIL_ONCE, FAIL_FROM_THERE_ON):
                for error in ERRORS[kind]:
                    for n in spread(total, MOST):
                        i += 1
                        hits += self.one(site, calls, i, kind, n, error, action)
            print(f"{faults.NAMES[kind]}: {total} calls in a file's life")
        wait_until(lambda: all_delivered(site), "every message is delivered")
        results.append((site, receiver, i + 1, hits))

    def undisturbed(self, count):
        receiver = self.make_receiver()
        site = self.make_site(receiver_port=receiver.port).start()
        for i in range(count):
            self.drop(site, i)
            wait_until(lambda: self.gone(site, i), "the file is taken in")
        wait_until(lambda: all_delivered(site), "every message is delivered")
        return outcome(site)

    def check(self, site, receiver, count):
        expected, found = self.undisturbed(count), outcome(site)
        check_same(self, expected, found)
        self.assertEqual(site.files_in("line1", "done"), [f"{i:04d}.csv" for i in range(count)])
        check_deliveries(self, site, receiver)
        self.assertEqual(journal_rows(site, "PRAGMA integrity_check"), [("ok",)])
        site.stop()
        site.start()
        check_same(self, expected, outcome(site), "after a restart")

    def test_each_call_fails_once_and_for_good(self):
        parts, results = ((WRITE, OPEN), (SYNC, RENAME, CREATE, FOLDER, UNLINK, READ)), []
        threads = [threading.Thread(target=self.part, args=(kinds, results)) for kinds in parts]
        for thread in threads:
            thread.start()
        for thread in threads:
            thread.join()
        self.assertEqual(len(results), len(parts), "a part failed, see above")
        print(f"{sum(r[3] for r in results)} calls failed; {self.told} times it had to wait for the cause to go")
        self.assertGreater(self.told, 8)
        self.assertGreater(sum(r[3] for r in results), 30)
        for site, receiver, count, _ in results:
            self.check(site, receiver, count)


if __name__ == "__main__":
    unittest.main()
