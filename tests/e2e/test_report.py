"""The agreement record of a period: made beside the running service, from real history, and held against the files
that were dropped, the HTTP interface and a count of one's own."""
import csv
import datetime
import html
import io
import json
import random
import re
import subprocess
import unittest

from harness import AGREED, SiteTest

DAY = datetime.timedelta(days=1)
HOUR = datetime.timedelta(hours=1)
HEADER = "kind,measured_at,measurand,item,value,note\n"


def stamp(at):
    return at.strftime("%Y-%m-%dT%H:%M:%SZ")


def text_of(page):
    return html.unescape(re.sub(r"<[^>]+>", " ", page))


class History:
    """Sixty days of two lines: checks every 8 h, a split sample every 6 h; line2 steps up on day 50."""

    def __init__(self, start):
        rng = random.Random(7)
        self.start = start
        self.rows = {"line1": [], "line2": []}  # (time, row)
        self.checks = {"line1": [], "line2": []}
        self.pairs = []  # (later time, sample, x, y)
        for shift in range(180):
            at = start + shift * 8 * HOUR
            for minute, line in enumerate(self.rows):
                for item, level in (("wheat-low", 10.62), ("wheat-high", 13.4)):
                    when = at + datetime.timedelta(minutes=minute)
                    self.add(line, "check", when, item, level + rng.gauss(0, 0.02) + self.step(line, when))
                    self.checks[line].append(when)
        for number in range(240):
            at, true = start + number * 6 * HOUR + 2 * HOUR, rng.uniform(9.5, 14.5)
            x = self.add("line1", "split", at, f"S-{number:03}", true + rng.gauss(0, 0.02))
            later = at + datetime.timedelta(minutes=7)
            y = self.add("line2", "split", later, f"S-{number:03}", true + rng.gauss(0, 0.02) + self.step("line2", later))
            self.pairs.append((later, f"S-{number:03}", x, y))

    def step(self, line, when):
        return 0.35 if line == "line2" and when >= self.start + 50 * DAY else 0

    def add(self, line, kind, when, item, value):
        value = round(value, 3)
        self.rows[line].append((when, f"{kind},{stamp(when)},protein,{item},{value},\n"))
        return value

    def file(self, line):
        return HEADER + "".join(row for _, row in sorted(self.rows[line]))


class Report(SiteTest):
    def report(self, site, name, *options, code=0):
        done = subprocess.run([AGREED, "report", str(site.config), "--out", str(site.folder / name), *options],
                              stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, timeout=60)
        self.assertEqual(done.returncode, code, done.stdout + done.stderr)
        return done

    def read(self, site, name):
        page = (site.folder / name).read_text()
        stem = name.removesuffix(".html")
        tables = [list(csv.DictReader(io.StringIO((site.folder / f"{stem}{end}").read_bytes().decode(), newline="")))
                  for end in (".csv", ".pairs.csv", ".rejected.csv")]
        return page, tables

    def test_a_month_with_all_that_can_happen(self):
        now = datetime.datetime.now(datetime.timezone.utc).replace(microsecond=0)
        history = History(now - 61 * DAY)
        site = self.make_site().start()
        for line in history.rows:
            site.drop(line, "history.csv", history.file(line))
        done = stamp(history.start + 40 * DAY)
        site.drop("line2", "told.csv", HEADER + f"intervention,{done},,noted,,lamp cleaned <with> care\n")
        site.drop("line1", "partly.csv", HEADER + f"check,{stamp(now - HOUR)},protein,wheat-low,10.62,\n"
                  + f"check,{stamp(now)},protein,wheat-low,ten & more,\n")
        site.wait_taken()
        history.checks["line1"].append(now - HOUR)
        alerts = site.get("/api/alerts")["alerts"]
        self.assertIn("agreement_lost", [a["kind"] for a in alerts])
        first_hash = site.get("/api/status")["service"]["config_sha256"]
        token = subprocess.run([AGREED, "token", str(site.config), "--role", "operator", "--json"],
                               stdout=subprocess.PIPE, text=True)
        self.assertEqual(token.returncode, 2)  # no tokens file yet: a change of the configuration
        site.stop()
        site.config.write_text(site.config.read_text() + "access: {tokens_file: tokens}\n")
        token = json.loads(subprocess.run([AGREED, "token", str(site.config), "--role", "operator", "--json"],
                                          stdout=subprocess.PIPE, text=True, check=True).stdout)["token"]
        site.start()
        lost = next(a for a in alerts if a["kind"] == "agreement_lost")
        status, _, body = site.request(f"/api/alerts/{lost['id']}/acknowledge", "POST",
                                       json.dumps({"by": "A. Byrne", "note": "lamp of line2"}),
                                       {"Authorization": f"Bearer {token}", "Content-Type": "application/json"})
        self.assertIn(status, (200, 201, 204), body)

        begin = now - 31 * DAY
        told = json.loads(self.report(site, "month.html", "--from", stamp(begin), "--json").stdout)
        page, (readings, pairs, rejected) = self.read(site, "month.html")
        # Everything measured in the period, and nothing else.
        dropped = [when for line in history.rows.values() for when, _ in line if when >= begin]
        self.assertEqual(len(readings), len(dropped) + 1)
        self.assertEqual(told["check_readings"], sum(when >= begin for line in history.checks.values() for when in line))
        mine = [p for p in history.pairs if p[0] >= begin]
        # A line for each decision level; one where no bias could be told with that pair.
        once = {p["sample"]: (p["sample"], float(p["x"]), float(p["y"])) for p in pairs}
        self.assertEqual(list(once.values()), [(sample, x, y) for _, sample, x, y in mine])
        self.assertEqual({p["level"] for p in pairs}, {"10.5", "13", ""})
        self.assertEqual(told["comparisons"][0]["pairs"], len(mine))
        # A row leads back to its file and line.
        row = next(r for r in readings if r["item"] == mine[0][1] and r["analyzer"] == "line2")
        file = next(f for f in site.get("/api/files")["files"] if f["id"] == row["file"])
        self.assertEqual(history.file("line2").splitlines()[int(row["line"]) - 1].split(",")[4], str(mine[0][3]))
        self.assertEqual(file["name"], "history.csv")
        # The end is what the service says now.
        comparison = site.get("/api/comparisons/protein")
        self.assertEqual(told["comparisons"][0]["verdict"], comparison["verdict"])
        last = [p for p in pairs if p["measured_at"] == pairs[-1]["measured_at"]]
        self.assertEqual([float(p["bias"]) for p in last], [level["bias"] for level in comparison["levels"]])
        self.assertEqual(last[0]["verdict"], comparison["verdict"])
        # Agreement was shown for the first 20 of the 31 days, and is lost within two days of the step.
        shares = told["comparisons"][0]["shares"]
        self.assertAlmostEqual(sum(shares.values()), 1, 9)
        self.assertTrue(20 / 31 <= shares["agreement_shown"] <= 22 / 31, shares)
        self.assertTrue(7 / 31 <= shares["disagreement_shown"], shares)
        # The page: alone, complete, and no text of others is markup.
        for outside in ("<script", "http://", "https://", "src=", "<link", "<with>"):
            self.assertNotIn(outside, page)
        words = text_of(page)
        for expected in ("lamp cleaned <with> care", "A. Byrne", "lamp of line2", "ten & more", "partly.csv", first_hash,
                         "Not all of them are the configuration this record was made with", "nothing was changed",
                         "not a medical device", "at the end of the period", told["chain"]["sha256"]):
            self.assertIn(expected, words)
        self.assertEqual([(r["name"], r["line"]) for r in rejected], [("partly.csv", "3")])
        self.assertIn("ten & more", rejected[0]["text"])

        # Nothing is written over.
        refused = self.report(site, "month.html", "--from", stamp(begin), code=2)
        self.assertIn("exists already", refused.stderr)
        # Before anything was measured: a record that says so.
        self.report(site, "before.html", "--from", "2020-01-01", "--to", "2020-02-01", code=1)
        page, tables = self.read(site, "before.html")
        self.assertIn("Nothing was measured or received in this period", text_of(page))
        self.assertEqual([len(table) for table in tables], [0, 0, 0])
        # Before the step, by measured time: agreement, and the alerts of today are not in it.
        told = json.loads(self.report(site, "calm.html", "--from", stamp(begin), "--to", stamp(begin + 15 * DAY), "--json").stdout)
        self.assertEqual(told["comparisons"][0]["verdict"], "agreement_shown")
        self.assertEqual(told["alerts"], 0)
        self.assertNotIn("A. Byrne", text_of(self.read(site, "calm.html")[0]))

    def test_wrong_use_says_what_was_expected(self):
        site = self.make_site()
        for options, words in ((["--from", "yesterday"], "expected a date"),
                               (["--from", "2026-01-01T00:00:00"], "offset"),
                               (["--from", "2026-02-01", "--to", "2026-01-01"], "The period is empty")):
            self.assertIn(words, self.report(site, "r.html", *options, code=2).stderr)
        missing = self.report(site, "r.html", "--from", "2026-01-01", code=3)
        self.assertIn("There is no journal", missing.stderr)
        self.assertEqual([p.name for p in site.folder.glob("*r.*")], [])


if __name__ == "__main__":
    unittest.main()
