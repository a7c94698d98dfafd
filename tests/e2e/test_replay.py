"""agreed replay: the alerts of a history known beforehand, beside those the service raised."""
import datetime
import json
import pathlib
import random
import shutil
import sqlite3
import subprocess
import unittest

from harness import AGREED, SiteTest, wait_until

START = datetime.datetime(2026, 1, 5, 6, tzinfo=datetime.timezone.utc)
STEP = START + datetime.timedelta(days=20)  # from then on line2 reads higher by twenty times its error
END = START + datetime.timedelta(days=23)
HEAD = "analyzer,kind,measured_at,measurand,item,value\n"


def text_of(at):
    return at.strftime("%Y-%m-%dT%H:%M:%S.000Z")


def history():
    """(time, analyzer, kind, item, value): a check of each standard every eight hours, a split sample every two."""
    rng = random.Random(20260105)
    rows, at, hour = [], START, 0
    while at < END:
        truth = rng.uniform(10.0, 13.6)
        for n, analyzer in enumerate(("line1", "line2")):
            shift = 0.4 if analyzer == "line2" and at >= STEP else 0.0
            for minutes, item, true in ((0, "wheat-low", 10.62), (1, "wheat-high", 13.1)):
                if hour % 8 == 0:
                    rows.append((at + datetime.timedelta(minutes=minutes, seconds=n), analyzer, "check", item,
                                 true + shift + rng.gauss(0, 0.02)))
            rows.append((at + datetime.timedelta(minutes=5, seconds=n), analyzer, "split", f"S-{hour:05d}",
                         truth + shift + rng.gauss(0, 0.02)))
        at += datetime.timedelta(hours=2)
        hour += 2
    return sorted(rows)


def csv(rows):
    return HEAD + "".join(f"{analyzer},{kind},{text_of(at)},protein,{item},{value:.2f}\n"
                          for at, analyzer, kind, item, value in rows)


def replay(config, *arguments):
    done = subprocess.run([AGREED, "replay", str(config), *map(str, arguments)], capture_output=True, text=True, timeout=120)
    return done.returncode, done.stdout, done.stderr


class AgainstThen(SiteTest):
    @classmethod
    def setUpClass(cls):
        cls.rows = history()

    def taken_in(self):
        """A service that took the history in, each analyzer's results in their order, so that nothing came late."""
        site = self.make_site().start()
        for line in ("line1", "line2"):
            site.drop(line, "history.csv", csv([row for row in self.rows if row[1] == line]))
        site.wait_taken()
        self.assertEqual(site.get("/api/status")["intake"]["readings"]["accepted"], len(self.rows))
        return site

    def test_the_same_configuration_raises_the_same_alerts_at_the_same_readings(self):
        site = self.taken_in()
        code, out, err = replay(site.config, "--json")  # while the service runs
        self.assertEqual((code, err), (0, ""))
        told = json.loads(out)
        raised = site.get("/api/alerts")["alerts"]
        self.assertGreaterEqual(len(raised), 3)
        self.assertEqual(told["readings"], len(self.rows))
        self.assertEqual(told["counts"]["only_now"], 0, out)
        self.assertEqual(told["counts"]["only_then"], 0, out)
        self.assertEqual(told["counts"]["matched"], told["counts"]["then"])
        for alert in told["alerts"]:
            for field in ("opened_at", "ended_at", "started_at", "severity", "title"):
                self.assertEqual(alert["now"][field], alert["then"][field], alert)
        # Twenty times its error: the very first check of each standard after the step must open its alert.
        first = {item: text_of(at) for at, analyzer, kind, item, _ in reversed(self.rows)
                 if analyzer == "line2" and kind == "check" and at >= STEP}
        for standard in ("wheat-low", "wheat-high"):
            opened = [a["now"]["opened_at"] for a in told["alerts"] if a["kind"] == "check_standard_unstable"
                      and a["subject"]["analyzer"] == "line2" and a["subject"]["standard"] == standard]
            self.assertIn(first[standard], opened)
        self.assertTrue([a for a in told["alerts"] if a["kind"] == "agreement_drifting"])

        site.stop()
        journal = site.folder / "state" / "journal.sqlite"
        before = journal.read_bytes()
        code, out, _ = replay(site.config, "--from", site.folder / "state")
        self.assertEqual(code, 0)
        self.assertIn("matched", out)
        self.assertNotIn("\033", out)
        self.assertLessEqual(max(len(line) for line in out.splitlines()
                                 if not line.startswith(("from", "through"))), 80)
        self.assertEqual(journal.read_bytes(), before)

        # Another setting: a budget of hundreds of false alerts a year opens at least as many.
        looser = site.folder / "looser.yaml"
        looser.write_text(site.config.read_text().replace("false_alerts_per_year: 6", "false_alerts_per_year: 200"))
        code, out, _ = replay(looser, "--json")
        other = json.loads(out)
        self.assertEqual(code, 0)
        self.assertGreater(other["counts"]["now"], told["counts"]["now"])
        self.assertEqual(other["counts"]["then"], told["counts"]["then"])

        # Between: before the step there is less to tell, and a time without readings is said to be one.
        code, out, _ = replay(site.config, "--json", "--between", text_of(STEP), "2026-02-01")
        self.assertEqual(code, 0)
        for alert in json.loads(out)["alerts"]:
            for side in ("now", "then"):
                self.assertGreaterEqual(alert[side]["opened_at"], text_of(STEP))
        code, out, _ = replay(site.config, "--between", "2020-01-01", "2020-02-01")
        self.assertEqual(code, 1)
        self.assertIn("There are no readings from 2020-01-01", out)

        newer = site.folder / "newer.sqlite"
        shutil.copy(journal, newer)
        with sqlite3.connect(newer) as database:
            database.execute("PRAGMA user_version = 99")
        database.close()
        code, _, err = replay(site.config, "--from", newer)
        self.assertEqual(code, 3)
        self.assertIn("99", err)

    def test_a_folder_of_drop_files(self):
        site = self.make_site()
        old = site.folder / "old"
        for analyzer in ("line1", "line2"):
            (old / analyzer / "2026").mkdir(parents=True)
            rows = csv([row for row in self.rows if row[1] == analyzer])
            (old / analyzer / "2026" / "01.csv").write_text(rows)
        at = text_of(START + datetime.timedelta(days=1, minutes=30))
        (old / "line1" / "02.csv").write_text(HEAD + f"line1,check,{at},protein,wheat-low,10.61\n"
                                              f"line1,check,{at},protein,wheat-low,10.61\n"
                                              f"line1,check,{at},protein,wheat-low,10.99\n"
                                              f"line1,check,yesterday,protein,wheat-low,10.6\n")
        (old / "line1" / "03.csv").write_text(HEAD + f"line1,void,{at},protein,wheat-low,\n")
        before = sorted(str(p) for p in old.rglob("*"))
        code, out, err = replay(site.config, "--from", old, "--json")
        self.assertEqual((code, err), (0, ""))
        told = json.loads(out)
        self.assertEqual(told["readings"], len(self.rows))
        self.assertEqual({k: told["folder"][k] for k in ("files", "repeated", "taken_back", "rejected")},
                         {"files": 4, "repeated": 1, "taken_back": 1, "rejected": 2})
        self.assertIn("conflict: found 10.99", told["folder"]["first_rejected"][0]["reason"])
        self.assertTrue([a for a in told["alerts"] if a["kind"] == "check_standard_unstable"])
        self.assertTrue(all(a["then"] is None for a in told["alerts"]))
        self.assertEqual(sorted(str(p) for p in old.rglob("*")), before)
        self.assertFalse((site.folder / "state").exists())

    def test_nothing_to_replay_and_wrong_use_are_told(self):
        site = self.make_site()
        code, _, err = replay(site.config)
        self.assertEqual(code, 3)
        self.assertIn("There is no journal", err)
        code, _, err = replay(site.config, "--from", site.folder / "drop" / "line1")
        self.assertEqual(code, 3)
        self.assertIn("neither journal.sqlite nor a folder named after an analyzer", err)
        for wrong in (["2026-02-01", "2026-01-01"], ["yesterday", "2026-01-01"], ["2026-01-01"]):
            code, _, err = replay(site.config, "--between", *wrong)
            self.assertEqual(code, 2, wrong)
            self.assertIn("--between", err)
        site.start()
        wait_until(lambda: (site.folder / "state" / "journal.sqlite").exists(), "there is a journal")
        code, out, _ = replay(site.config)
        self.assertEqual(code, 1)
        self.assertIn("There are no readings of what this configuration watches", out)


if __name__ == "__main__":
    unittest.main()
