"""verify, backup and restore, and journals that must not be used, all through the real executable."""
import json
import os
import pathlib
import shutil
import sqlite3
import subprocess
import threading
import unittest

import campaign
import faults
from faults import CREATE, KILL, RENAME, SYNC, UNLINK, WRITE, Faults, spread
from harness import AGREED, SiteTest, wait_until
from outcome import all_delivered, check_same, outcome


class Commands(SiteTest):
    def setUp(self):
        self.receiver = self.make_receiver()
        self.site = self.make_site(receiver_port=self.receiver.port, decimals=3).start()

    def agreed(self, command, *arguments, site=None, environment=None):
        site = site or self.site
        return subprocess.run([AGREED, command, site.config, *map(str, arguments)], capture_output=True, text=True, timeout=60,
                              check=False, env={**os.environ, **(environment or {})})

    def feed(self, shifts, first=0):
        for analyzer, name, text in campaign.files(shifts):
            if int(name.split("-")[1][:3]) >= first:
                self.site.drop(analyzer, name, text)
        self.site.wait_taken()
        wait_until(lambda: all_delivered(self.site), "every message is delivered")

    def verify(self, *arguments, site=None):
        done = self.agreed("verify", "--json", *arguments, site=site)
        return done.returncode, json.loads(done.stdout)

    @property
    def journal(self):
        return self.site.folder / "state" / "journal.sqlite"

    # -- verify

    def test_a_running_service_is_verified_while_results_arrive(self):
        files = list(campaign.files(40))
        heads, sequences = [], []

        def look():
            for _ in range(15):
                code, proof = self.verify(*[x for h in heads for x in ("--head", h)])
                self.assertEqual((code, proof["faults"]), (0, []))
                sequences.append(proof["chain"]["sequence"])
                heads.append(f"{proof['chain']['sequence']}:{proof['chain']['sha256']}")

        looking = threading.Thread(target=look)
        looking.start()
        for analyzer, name, text in files:
            self.site.drop(analyzer, name, text)
        self.site.wait_taken()
        looking.join()
        self.assertEqual(len(heads), 15, "every look found an unbroken chain that goes on from all heads before")
        self.assertEqual(sequences, sorted(sequences))
        wait_until(lambda: self.verify()[1]["chain"] == self.site.get("/api/status")["chain"], "both name the same head")

    def test_what_people_read(self):
        self.feed(3)
        done = self.agreed("verify")
        self.assertEqual(done.returncode, 0, done.stderr)
        self.assertIn("nothing was changed", done.stdout)
        self.assertIn(self.site.get("/api/status")["chain"]["sha256"], done.stdout)
        self.assertNotIn("\x1b", done.stdout)
        self.site.stop()
        with sqlite3.connect(self.journal) as database:
            database.execute("UPDATE readings SET value = value + 0.001 WHERE item = 'wheat-low'")
        done = self.agreed("verify")
        self.assertEqual(done.returncode, 1)
        self.assertIn("do not give its hash", done.stdout)

    def test_a_cut_and_a_rewritten_tail_show_against_a_head_kept_elsewhere(self):
        self.feed(4)
        old = self.site.get("/api/status")["chain"]
        backup = self.site.folder / "backup.sqlite"
        self.assertEqual(self.agreed("backup", backup).returncode, 0)
        self.feed(8, first=4)
        new = self.site.get("/api/status")["chain"]
        self.site.stop()
        head = lambda chain: f"{chain['sequence']}:{chain['sha256']}"
        self.assertEqual(self.verify("--head", head(old), "--head", head(new))[0], 0)
        # The backup is the journal with its tail cut off: whole in itself, and shorter than what was noted.
        self.assertEqual(self.verify("--file", backup, "--head", head(old))[0], 0)
        code, proof = self.verify("--file", backup, "--head", head(new))
        self.assertEqual((code, proof["heads_not_found"]), (1, [new]))
        self.assertIn("cut off", proof["faults"][0])
        # Going on from the backup with other results makes a chain that is whole in itself and not the one noted.
        self.assertEqual(self.agreed("restore", backup).returncode, 0)
        self.site.start()
        for analyzer, name, text in campaign.files(14):
            if name >= "shift-008" and name.startswith("shift"):
                self.site.drop(analyzer, name, text)
        self.site.wait_taken()
        wait_until(lambda: self.site.get("/api/status")["chain"]["sequence"] >= new["sequence"], "the other chain is as long")
        self.assertEqual(self.verify()[0], 0)
        code, proof = self.verify("--head", head(old), "--head", head(new))
        self.assertEqual((code, proof["heads_not_found"]), (1, [new]))
        self.assertIn("written anew", proof["faults"][0])

    def test_wrong_use(self):
        for arguments in (("--head", "12"), ("--head", "12:abc"), ("--head", "x:" + 64 * "a"), ("--nonsense",)):
            self.assertEqual(self.agreed("verify", *arguments).returncode, 2, arguments)
        self.assertEqual(self.agreed("backup").returncode, 2)
        self.assertEqual(self.agreed("verify", "--file", self.site.folder / "none").returncode, 3)
        for command in ("verify", "backup", "restore"):
            shown = subprocess.run([AGREED, command, "--help"], capture_output=True, text=True, check=True).stdout
            self.assertIn("Exit status", shown)
            self.assertIn("Example", shown)
        broken = self.site.folder / "broken.yaml"
        broken.write_text("site: Harrow Mill\nanalysers: {}\n")
        done = subprocess.run([AGREED, "verify", broken], capture_output=True, text=True, check=False)
        self.assertEqual(done.returncode, 2)
        self.assertIn("broken.yaml:2", done.stderr)

    # -- backup and restore

    def test_a_backup_of_a_running_service_and_back_again(self):
        self.feed(10)
        before = outcome(self.site)
        backup = self.site.folder / "kept" / "mill.sqlite"
        backup.parent.mkdir()
        os.chmod(self.journal, 0o640)
        done = self.agreed("backup", "--json", backup)
        self.assertEqual(done.returncode, 0, done.stderr)
        self.assertEqual(backup.stat().st_mode & 0o037, 0, "it can be read by nobody who may not read the journal")
        self.assertEqual([p.name for p in backup.parent.iterdir()], ["mill.sqlite"])
        self.assertEqual(self.verify("--file", backup)[0], 0)
        content = backup.read_bytes()
        refused = self.agreed("backup", backup)
        self.assertEqual(refused.returncode, 3)
        self.assertIn("not overwritten", refused.stderr)
        self.assertEqual(backup.read_bytes(), content)

        running = self.agreed("restore", backup)
        self.assertEqual(running.returncode, 3)
        self.assertIn("in use by process", running.stderr)
        self.feed(14, first=10)
        after = outcome(self.site)
        self.site.stop()
        state = self.site.folder / "state"
        done = self.agreed("restore", backup)
        self.assertEqual(done.returncode, 0, done.stderr)
        kept = state / "journal.replaced.sqlite"
        for word in (str(kept), "inbox", "same ids"):
            self.assertIn(word, done.stdout)
        self.assertEqual(self.verify("--file", kept)[0], 0)
        self.assertEqual(self.journal.stat().st_mode & 0o037, 0, "nor can what is put back")
        self.site.start()
        check_same(self, before, outcome(self.site))
        # What came after the backup is taken in again from done/; what the backup knows counts once.
        for analyzer in ("line1", "line2"):
            for file in sorted((self.site.inbox(analyzer) / "done").rglob("*"), key=lambda f: f.name):
                if file.is_file() and file.name >= "shift-010":
                    os.rename(file, self.site.inbox(analyzer) / file.name)
                    wait_until(lambda: not (self.site.inbox(analyzer) / file.name).exists(), "it is taken in again")
        self.site.wait_taken()
        again = outcome(self.site)
        self.assertEqual(again["readings"]["accepted"], after["readings"]["accepted"])
        for what in ("charts", "comparisons"):
            check_same(self, after[what], again[what], what)

    def test_backups_while_results_arrive_are_whole_each(self):
        made = []

        def back_up():
            for i in range(8):
                file = self.site.folder / f"backup-{i}.sqlite"
                done = self.agreed("backup", "--json", file)
                made.append((done.returncode, json.loads(done.stdout)["chain"]["sequence"], file))

        backing_up = threading.Thread(target=back_up)
        backing_up.start()
        self.feed(40)
        backing_up.join()
        self.assertEqual([code for code, _, _ in made], [0] * 8)
        for _, sequence, file in made:
            self.assertEqual(self.verify("--file", file)[1]["chain"]["sequence"], sequence)

    def test_a_backup_with_a_changed_row_is_not_restored(self):
        self.feed(4)
        backup = self.site.folder / "backup.sqlite"
        self.agreed("backup", backup)
        head = self.site.get("/api/status")["chain"]
        self.site.stop()
        with sqlite3.connect(backup) as database:
            database.execute("UPDATE readings SET value = 10.7 WHERE item = 'wheat-low'")
        done = self.agreed("restore", backup)
        self.assertEqual(done.returncode, 1)
        self.assertIn("nothing was restored", done.stdout)
        self.assertEqual(self.verify()[1]["chain"], head)
        self.assertFalse((self.site.folder / "state" / "journal.replaced.sqlite").exists())

    def test_a_backup_without_room_leaves_nothing_behind(self):
        self.feed(4)
        small = self.site.folder / "small"
        small.mkdir()
        mounted = subprocess.run(["mount", "-t", "tmpfs", "-o", "size=64k", "tmpfs", small], capture_output=True, check=False)
        if mounted.returncode != 0:
            self.skipTest("no tmpfs can be mounted here")
        self.addCleanup(subprocess.run, ["umount", "-l", small], check=False)
        done = self.agreed("backup", small / "backup.sqlite")
        self.assertEqual(done.returncode, 3)
        self.assertIn("full", done.stderr)
        self.assertEqual(list(small.iterdir()), [])
        self.assertEqual(self.site.status_code("/health/ready"), 200)

    def test_a_restore_killed_anywhere_loses_neither_journal(self):
        self.feed(4)
        backup = self.site.folder / "backup.sqlite"
        self.agreed("backup", backup)
        old = self.site.get("/api/status")["chain"]
        self.feed(8, first=4)
        new = self.site.get("/api/status")["chain"]
        self.site.kill()  # its write-ahead log stays
        pristine = self.site.folder / "pristine"
        shutil.copytree(self.site.folder / "state", pristine)
        calls = Faults(self.site)
        self.addCleanup(calls.close)
        kills = 0
        for kind in (WRITE, SYNC, RENAME, CREATE, UNLINK):
            for n in spread(60, 60 if kind in (RENAME, CREATE, UNLINK, SYNC) else 4):
                shutil.rmtree(self.site.folder / "state")
                shutil.copytree(pristine, self.site.folder / "state")
                calls.arm(kind, KILL, n)
                done = self.agreed("restore", backup, environment=self.site.environment)
                calls.disarm()
                if calls.hits == 0:
                    break
                kills += 1
                self.after_a_killed_restore(backup, old, new, f"killed before {calls.hit}")
                self.assertLess(done.returncode, 0)
        print(f"{kills} kills")
        self.assertGreater(kills, 8)

    def after_a_killed_restore(self, backup, old, new, when):
        state = self.site.folder / "state"
        if (state / "journal.restoring.sqlite").exists():
            refused = subprocess.run([AGREED, "run", self.site.config], capture_output=True, text=True, timeout=20, check=False)
            self.assertEqual(refused.returncode, 3, when)
            self.assertIn("agreed restore", refused.stderr)
        else:
            self.assertIn(self.verify()[1]["chain"], (old, new), when)
        self.assertEqual(self.agreed("restore", backup).returncode, 0, when)
        self.assertEqual(self.verify()[1]["chain"], old, when)
        kept = [self.verify("--file", f)[1]["chain"] for f in state.glob("journal.replaced*.sqlite")]
        self.assertIn(new, kept, f"{when}: what was there is kept with all that was in its log")

    # -- journals that must not be used

    def refusal(self):
        done = subprocess.run([AGREED, "run", self.site.config], capture_output=True, text=True, timeout=20, check=False)
        self.assertEqual(done.returncode, 3)
        return done.stderr

    def test_a_journal_of_a_newer_program(self):
        self.feed(2)
        self.site.stop()
        with sqlite3.connect(self.journal) as database:
            database.execute("PRAGMA user_version = 99")
        for words in (self.refusal(), self.agreed("verify").stderr, self.agreed("backup", self.site.folder / "b").stderr):
            self.assertIn("newer program (schema 99", words)
            self.assertIn("agreed restore", words)
        with sqlite3.connect(self.journal) as database:
            database.execute("PRAGMA user_version = 1")
        self.assertEqual(self.verify()[0], 0)

    def test_a_truncated_and_a_corrupted_journal(self):
        self.feed(10)
        self.site.stop()
        whole = self.journal.read_bytes()
        for broken in (whole[: len(whole) // 2], whole[:1000], b"", b"\xee" * len(whole), whole[:100] + b"\xee" * 3996 + whole[4096:]):
            self.journal.write_bytes(broken)
            words = self.refusal()
            self.assertIn("damaged", words)
            self.assertIn("agreed restore", words)
            code, proof = self.verify()
            self.assertEqual(code, 1, proof)
            self.assertTrue(proof["faults"])
        self.journal.write_bytes(whole)
        self.assertEqual(self.verify()[0], 0)

    def test_a_journal_moved_away_while_the_service_runs(self):
        self.feed(2)
        away = self.site.folder / "away.sqlite"
        os.rename(self.journal, away)
        self.site.drop("line1", "late.csv", "kind,measured_at,measurand,item,value\ncheck,2026-01-09T06:00:00Z,protein,wheat-low,10.6\n")
        told = wait_until(lambda: self.not_ready(), "it says that the journal is gone")
        self.assertIn("moved, deleted or replaced", told)
        self.assertTrue((self.site.inbox("line1") / "late.csv").exists())
        self.assertFalse(self.journal.exists(), "no empty journal takes its place")
        os.rename(away, self.journal)
        self.site.wait_taken()
        wait_until(lambda: self.not_ready() == "", "it is ready again")
        self.assertEqual(self.verify()[0], 0)

    def not_ready(self):
        status, _, body = self.site.request("/health/ready")
        return "" if status == 200 else body.decode()

    def test_the_executable_has_nothing_of_the_tests_faults_in_it(self):
        self.assertNotIn(b"AGREED_FAULTS", pathlib.Path(AGREED).read_bytes())
        self.assertIn(b"AGREED_FAULTS", pathlib.Path(faults.LIBRARY).read_bytes())


if __name__ == "__main__":
    unittest.main()
