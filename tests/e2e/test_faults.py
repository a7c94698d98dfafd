"""What the real service does when its surroundings fail: a full disk, a locked journal, a crash within a large file,
an end asked for at a bad moment."""
import json
import os
import socket
import sqlite3
import subprocess
import time
import unittest

from harness import AGREED, SiteTest, wait_until
from plant import START, csv, rfc3339

ROWS = 60_000


def check(i, value=10.6):
    return ("check", rfc3339(START + i), "protein", "wheat-low", value)


class Faults(SiteTest):
    def mount_state(self, site, options):
        """The state folder in a small memory file system, where that is permitted."""
        state = site.folder / "state"
        state.mkdir(exist_ok=True)
        made = subprocess.run(["mount", "-t", "tmpfs", "-o", options, "tmpfs", state], capture_output=True, text=True, check=False)
        if made.returncode != 0:
            self.skipTest(f"no tmpfs can be mounted here: {made.stderr.strip()}")
        self.addCleanup(subprocess.run, ["umount", "-l", state], check=False)
        return state

    def reasons(self, site):
        status, _, body = site.request("/health/ready")
        return None if status == 200 else "; ".join(json.loads(body)["reasons"])

    def readings(self, site):
        return site.get("/api/status")["intake"]["readings"]

    def test_a_full_disk_is_told_and_intake_goes_on_by_itself(self):
        site = self.make_site()
        state = self.mount_state(site, "size=4m")
        site.start()
        site.drop("line1", "first.csv", csv([check(0)]))
        site.wait_taken()
        with open(state / "ballast", "wb", buffering=0) as ballast:
            try:
                while True:
                    ballast.write(b"x" * 4096)
            except OSError:
                pass
        site.drop("line1", "second.csv", csv([check(i) for i in range(1, 5000)]))
        told = wait_until(lambda: self.reasons(site), "the service says that it is not ready")
        self.assertIn("full", told)
        for _ in range(40):  # it says so as long as the file waits, also when a piece of it still fitted
            self.assertIn("full", self.reasons(site) or "ready")
            time.sleep(0.1)
        self.assertEqual(site.get("/api/status")["overall"], "attention")
        self.assertIn("full", site.request("/")[2].decode())
        self.assertEqual([p.name for p in site.inbox("line1").iterdir() if p.is_file()], ["second.csv"])
        self.assertLess(self.readings(site)["accepted"], 5000)
        os.remove(state / "ballast")
        wait_until(lambda: self.readings(site)["accepted"] == 5000, "the file that waited is taken in")
        wait_until(lambda: self.reasons(site) is None, "it is ready again")
        site.wait_taken()
        readings = self.readings(site)
        self.assertEqual((readings["accepted"], readings["rejected"]), (5000, 0))

    def test_a_journal_locked_by_another_process(self):
        site = self.make_site().start()
        other = sqlite3.connect(site.folder / "state" / "journal.sqlite", isolation_level=None)
        self.addCleanup(other.close)
        other.execute("BEGIN IMMEDIATE")
        site.drop("line1", "a.csv", csv([check(0)]))
        told = wait_until(lambda: self.reasons(site), "the service says that it is not ready")
        self.assertIn("lock", told)
        self.assertEqual(site.get("/api/status")["overall"], "attention")
        other.execute("ROLLBACK")
        site.wait_taken()
        wait_until(lambda: self.reasons(site) is None, "it is ready again")
        self.assertEqual(self.readings(site)["accepted"], 1)

    def refusal(self, site):
        done = subprocess.run([AGREED, "run", site.config], capture_output=True, text=True, timeout=20, check=False)
        self.assertEqual(done.returncode, 3, done.stderr)
        return done.stderr

    def test_a_second_service_on_the_same_state_is_refused(self):
        site = self.make_site().start()
        self.assertIn("state", self.refusal(site))
        self.assertEqual(site.status_code("/health/ready"), 200)

    def test_a_state_folder_that_cannot_be_written_to(self):
        site = self.make_site()
        state = self.mount_state(site, "size=1m,ro")
        self.assertIn(str(state), self.refusal(site))

    def test_a_damaged_journal_is_refused_with_the_way_to_restore(self):
        site = self.make_site().start()
        site.drop("line1", "a.csv", csv([check(i) for i in range(2000)]))
        site.wait_taken()
        site.stop()
        journal = site.folder / "state" / "journal.sqlite"
        sound = journal.read_bytes()
        for damaged in (sound[: len(sound) // 2], b"\0" * 4096 + sound[4096:], b""):
            journal.write_bytes(damaged)
            words = self.refusal(site)
            self.assertIn(str(journal), words)
            self.assertIn("backup", words)
            self.assertEqual(journal.read_bytes(), damaged, "what is damaged is left as it is")
        journal.write_bytes(sound)
        site.start()
        self.assertEqual(self.readings(site)["accepted"], 2000)

    def test_a_crash_within_a_large_file_and_the_file_once_more(self):
        site = self.make_site().start()
        rows = [check(i, 10.6 if i % 7000 else 9.9) for i in range(ROWS)]
        rows += [("check", "yesterday", "protein", "wheat-low", 10.6)] + [check(0, 10.7)]  # a bad row and a conflict
        rows[10] = ("check", "never", "protein", "wheat-low", 10.6)
        text = csv(rows)
        crashes = 0
        for _ in range(5):
            site.drop("line1", "large.csv", text) if crashes == 0 else None
            wait_until(lambda: 0 < self.readings(site)["accepted"], "the first batch is committed")
            if self.readings(site)["accepted"] == ROWS - 1:
                break
            site.kill()
            site.start(wait_ready=False)
            crashes += 1
        print(f"{crashes} crashes within the file")
        site.wait_taken()
        expected = {"accepted": ROWS - 1, "repeated": 0, "rejected": 3, "voided": 0, "censored": 0}
        self.assertEqual(self.readings(site), expected)
        self.assertEqual(site.get("/api/status")["intake"]["files"], {"done": 1, "repeated": 0, "rejected": 0})
        alerts = {a["kind"]: a["details"] for a in site.get("/api/alerts?state=open")["alerts"]}
        self.assertEqual(alerts["file_rejected"]["rows"], 3)
        self.assertEqual(alerts["readings_conflict"]["count"], 1)

        clean = csv([check(-1 - i) for i in range(25_000)])
        for name in ("one.csv", "two.csv"):
            site.drop("line2", name, clean)
            site.wait_taken("a large file is taken in, and once more")
        self.assertEqual(site.get("/api/status")["intake"]["files"], {"done": 2, "repeated": 1, "rejected": 0})
        self.assertEqual(self.readings(site), {**expected, "accepted": ROWS - 1 + 25_000})

    def test_it_ends_within_two_seconds_while_everything_is_under_way(self):
        site = self.make_site().start()
        other = sqlite3.connect(site.folder / "state" / "journal.sqlite", isolation_level=None)
        self.addCleanup(other.close)
        other.execute("BEGIN IMMEDIATE")  # the engine waits for the lock and the watchers for the engine
        site.drop("line1", "large.csv", csv([check(i) for i in range(ROWS)]))
        for i in range(300):
            site.drop("line2", f"{i:03d}.csv", csv([check(i)]))
        host, port = site.base.removeprefix("http://").split(":")
        for i in range(50):
            client = socket.create_connection((host, int(port)))
            self.addCleanup(client.close)
            client.sendall((b"GET / HTTP/1.1\r\nHost: a\r\n\r\n", b"GET / HT", b"")[i % 3])
        wait_until(lambda: self.reasons(site), "it says that it cannot go on")
        time.sleep(0.2)
        code, seconds = site.stop()
        print(f"ended after {seconds:.2f} s")
        self.assertEqual(code, 0)
        self.assertLess(seconds, 2.3)
        other.execute("ROLLBACK")
        site.start()
        site.wait_taken(seconds=120)
        self.assertEqual(self.readings(site)["accepted"], ROWS + 300)


if __name__ == "__main__":
    unittest.main()
