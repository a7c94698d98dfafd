"""The exports of examples/formats: shown by agreed check --sample and taken in by the real service."""
import csv
import json
import pathlib
import shutil
import sqlite3
import subprocess
import unittest

from harness import AGREED, Site, SiteTest, wait_until

EXAMPLES = pathlib.Path(__file__).resolve().parents[2] / "examples" / "formats"


def expected():
    with open(EXAMPLES / "expected.csv", encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def check(config, file, analyzer, *options):
    run = subprocess.run([AGREED, "check", str(config), "--sample", str(file), "--analyzer", analyzer, *options],
                         capture_output=True, text=True, timeout=60)
    return run.returncode, run.stdout, run.stderr


class Samples(unittest.TestCase):
    def test_each_example_is_shown_row_by_row_as_expected(self):
        rows = expected()
        for file in sorted({row["file"] for row in rows}):
            analyzer = file.split(".")[0]
            code, out, err = check(EXAMPLES / "mill.yaml", EXAMPLES / file, analyzer, "--json")
            self.assertEqual(code, 0, f"{file}: {out} {err}")
            answer = json.loads(out)
            self.assertEqual((answer["bad"], answer["unusable"], answer["not_taken"]), (0, None, None))
            seen = [{"file": file, "line": str(row["line"]), "analyzer": row["analyzer"], "kind": row["kind"],
                     "measured_at": row["measured_at"], "measurand": row["measurand"], "item": row["item"],
                     "replicate": str(row["replicate"]),
                     "value": "" if row["value"] is None else repr(row["value"]).removesuffix(".0"),
                     "censored": row["censored"] or "", "operator": row["operator"], "note": row["note"],
                     "ambiguous": "twice" if row["clock_ambiguous"] else ""} for row in answer["rows"]]
            self.assertEqual(seen, [row for row in rows if row["file"] == file])

    def test_a_bad_row_is_named_and_the_exit_status_says_so(self):
        site = Site()
        self.addCleanup(site.close)
        sample = site.folder / "sample.csv"
        sample.write_text("kind,measured_at,measurand,item,value\n"
                          "check,2026-01-05T06:00:00Z,protein,wheat-low,10.6\n"
                          "check,2026-01-05T07:00:00Z,protien,wheat-low,10.6\n")
        code, out, _ = check(site.config, sample, "line1")
        self.assertEqual(code, 1)
        self.assertIn("line 2: check 2026-01-05T06:00:00.000Z protein wheat-low 10.6\n", out)
        self.assertIn('line 3, column 3: NOT USABLE: measurand: "protien" is not known; did you mean "protein"?', out)
        self.assertIn("nothing was taken in", out)
        code, out, _ = check(site.config, sample, "line1", "--json")
        self.assertEqual((code, json.loads(out)["good"], json.loads(out)["bad"]), (1, 1, 1))
        self.assertFalse((site.folder / "state").exists())

        sample.write_text("kind,measured_at,measurand,value\n")
        code, out, _ = check(site.config, sample, "line1")
        self.assertEqual(code, 1)
        self.assertIn('the file cannot be used: the header has no column "item"', out)

        code, _, err = check(site.config, sample, "lien1")
        self.assertEqual(code, 2)
        self.assertIn('did you mean "line1"?', err)
        self.assertEqual(check(site.config, site.folder / "nowhere.csv", "line1")[0], 3)
        self.assertEqual(check(site.config, site.folder, "line1")[0], 3)

    def test_a_name_that_is_not_taken_is_said(self):
        code, out, _ = check(EXAMPLES / "mill.yaml", EXAMPLES / "press.dat", "bench1")
        self.assertEqual(code, 1)
        self.assertIn("the file would not be taken: format bench_export does not take files of that name", out)


class Service(SiteTest):
    def test_the_service_takes_the_examples_in(self):
        config = (EXAMPLES / "mill.yaml").read_text(encoding="utf-8")
        site = self.make_site(config=config.replace("inbox: drop/", "settle: 200ms, rescan: 1s, inbox: drop/"))
        rows = expected()
        files = sorted({row["file"] for row in rows})
        for file in files:
            (site.inbox(file.split(".")[0])).mkdir(parents=True, exist_ok=True)
        site.start()
        left = site.inbox("bench1") / "day_SUMMARY.csv"
        shutil.copy(EXAMPLES / "bench1.csv", left)
        for file in files:
            site.drop(file.split(".")[0], file, (EXAMPLES / file).read_bytes())
        wait_until(lambda: all(site.files_in(f.split(".")[0], "done") == [f] for f in files), "every example is in done/")
        self.assertTrue(left.exists(), "a name to ignore stays where it is")
        site.stop()

        journal = sqlite3.connect(site.folder / "state" / "journal.sqlite")
        self.addCleanup(journal.close)
        self.assertEqual(journal.execute("SELECT count(*) FROM rejected_rows").fetchone()[0], 0)
        stored = sorted(journal.execute(
            "SELECT a.text, r.kind, m.text, r.item, r.measured_at, r.replicate, r.value, r.censored FROM readings r "
            "JOIN names a ON a.id = r.analyzer JOIN names m ON m.id = r.measurand"))
        self.assertEqual(len(stored), sum(row["kind"] in ("check", "split") for row in rows))
        values = sorted((row["analyzer"], row["measurand"], row["item"], float(row["value"])) for row in rows if row["value"])
        self.assertEqual(sorted((r[0], r[2], r[3], r[6]) for r in stored), values)
        self.assertEqual(journal.execute("SELECT count(*) FROM interventions").fetchone()[0], 1)
        self.assertEqual(journal.execute("SELECT count(*) FROM voids").fetchone()[0], 1)


if __name__ == "__main__":
    unittest.main()
