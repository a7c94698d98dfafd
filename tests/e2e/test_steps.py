"""SIGKILL before each call with which the service changes something outside itself, over a file's whole life: read, committed,
moved, told. Between two such calls the outside does not change, so these are all the moments at which it can be killed.

AGREED_STEPS=all tries every one; without it at most as many of each kind as fit a short run."""
import os
import shutil
import unittest

import faults
from faults import CREATE, FOLDER, KILL, RENAME, SEND, SYNC, UNLINK, WRITE, Faults, spread
from harness import SiteTest, wait_until
from outcome import all_delivered, check_deliveries, check_same, journal_rows, moved_files, outcome
from plant import Plant, csv

MOST = 10_000 if os.environ.get("AGREED_STEPS") == "all" else 8
KINDS = (WRITE, SYNC, RENAME, CREATE, FOLDER, UNLINK, SEND)


def history(plant):
    """A calm month."""
    checks, splits = plant.checks(0, 90), plant.splits(0, 360)
    return {analyzer: sorted(checks[analyzer] + splits[analyzer], key=lambda r: r[1]) for analyzer in checks}


def eventful(plant, before):
    """A file of line2 with all that one can hold: results far off, so that alerts are told; an intervention, a void with its
    correction, a conflict, a censored result and a bad row."""
    rows = plant.checks(90, 2)["line2"] + plant.splits(360, 8)["line2"]
    rows = [(*r[:4], round(r[4] + 0.4, 3)) for r in rows]
    check, split = before[-6], before[-1]
    rows += [("void", *check[1:4], ""), (*check[:4], round(check[4] + 0.011, 3)), (*split[:4], round(split[4] + 0.5, 3)),
             ("intervention", check[1], "", "noted", ""), ("split", split[1], "protein", "C-1", "<0.05"),
             ("check", "yesterday", "protein", "wheat-low", 10.6)]
    return csv(rows)


class Steps(SiteTest):
    def setUp(self):
        plant = Plant(seed=14)
        rows = history(plant)
        self.before = self.make_site(decimals=3).start()
        for analyzer in ("line1", "line2"):
            partner = plant.checks(90, 2)["line1"] + plant.splits(360, 8)["line1"] if analyzer == "line1" else []
            self.before.drop(analyzer, "history.csv", csv(rows[analyzer] + partner))
        self.before.wait_taken()
        self.before.stop()
        self.eventful = eventful(Plant(seed=15), rows["line2"])

    def prepared(self):
        """A site with a month of history, about to be started with the calls preloaded."""
        receiver = self.make_receiver()
        site = self.make_site(receiver_port=receiver.port, decimals=3)
        shutil.copytree(self.before.folder / "state", site.folder / "state")
        calls = Faults(site)
        self.addCleanup(calls.close)
        return site, receiver, calls

    def finish(self, site, analyzer, name):
        wait_until(lambda: not (site.inbox(analyzer) / name).exists(), f"{name} is moved")
        wait_until(lambda: all_delivered(site), "every message is delivered")

    def life(self, text, kinds, n):
        """One file's life, killed before the n-th call of `kinds` (0: not at all), then gone on with. The site, and how many
        calls of each kind there were."""
        site, receiver, calls = self.prepared()
        site.start()
        calls.arm(kinds, KILL if n else faults.COUNT, n)
        site.drop("line2", "file.csv", text)
        if n:
            wait_until(lambda: calls.hits or self.told(site), "it is killed, or the file's life is over")
        if calls.hits:
            site.process.wait(20)
            calls.disarm()
            site.kill()
            site.start()
        self.finish(site, "line2", "file.csv")
        return site, receiver, calls

    def told(self, site):
        """The file is moved and all is delivered; asked of the files only, since an HTTP answer would be a call too."""
        return not (site.inbox("line2") / "file.csv").exists() and all_delivered(site)

    def campaign(self, text, must_tell):
        calm, calm_receiver, calls = self.life(text, WRITE, 0)
        totals = {kind: calls.count(kind) for kind in KINDS}
        expected, files = outcome(calm), moved_files(calm)
        self.assertEqual({a["kind"] for a in expected["alerts"]} & must_tell, must_tell)
        check_deliveries(self, calm, calm_receiver)
        kills = 0
        for kind, total in totals.items():
            for n in spread(total, MOST):
                with self.subTest(kind=faults.NAMES[kind], n=n):
                    site, receiver, calls = self.life(text, kind, n)
                    kills += calls.hits
                    found = outcome(site)
                    check_same(self, expected, found, f"killed before {calls.hit}")
                    self.assertEqual(moved_files(site), files, calls.hit)
                    check_deliveries(self, site, receiver)
                    self.assertEqual(journal_rows(site, "PRAGMA integrity_check"), [("ok",)])
                    site.close()
        print(f"{kills} kills; calls:", {faults.NAMES[kind]: total for kind, total in totals.items()})
        self.assertGreater(kills, 20 if "readings_conflict" in must_tell else 5)

    def test_the_life_of_an_eventful_file(self):
        self.campaign(self.eventful, {"check_standard_unstable", "file_rejected", "readings_conflict"})

    def test_the_life_of_an_unusable_file(self):
        self.campaign(bytes(range(256)) * 4 + b"\n", {"file_rejected"})


class FirstStart(SiteTest):
    def test_the_first_start(self):
        """Nothing is there yet: killed anywhere while the journal is made, the next start begins anew."""
        kills = 0
        for kind in (WRITE, SYNC, RENAME, CREATE, FOLDER, UNLINK):
            for n in spread(40, MOST):
                site = self.make_site()
                calls = Faults(site)
                self.addCleanup(calls.close)
                calls.arm(kind, KILL, n)
                try:
                    site.start(wait_ready=False)
                    wait_until(lambda: calls.hits or site.status_code("/health/ready") == 200, "it is killed or ready")
                except AssertionError:
                    self.assertEqual(calls.hits, 1, "only a kill may keep it from starting")
                if calls.hits == 0:
                    site.close()
                    break
                kills += 1
                site.process.wait(20)
                calls.disarm()
                site.start()
                site.drop("line1", "a.csv", csv([("check", "2026-01-05T06:00:00Z", "protein", "wheat-low", 10.6)]))
                site.wait_taken()
                self.assertEqual(site.get("/api/status")["intake"]["readings"]["accepted"], 1, calls.hit)
                site.close()
        print(f"{kills} kills")
        self.assertGreater(kills, 10)


if __name__ == "__main__":
    unittest.main()
