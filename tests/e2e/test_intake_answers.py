"""What came in can be looked up and taken out again, page by page, while more comes."""
import csv as csv_module
import io
import json

from harness import SiteTest
from plant import Plant, csv


class IntakeAnswers(SiteTest):
    def pages(self, site, path, name, after=None):
        """Every row of a list (behind the cursor `after`), followed by its cursors."""
        rows = []
        while True:
            page = site.get(path + (f"&after={after}" if after else ""))
            rows += page[name]
            after = page["next"]
            if after is None:
                return rows

    def test_files_come_newest_first_and_a_walk_is_not_disturbed_by_new_ones(self):
        site = self.make_site().start()
        plant = Plant(seed=5)
        for i in range(4):
            for analyzer, rows in plant.checks(i, 1).items():
                site.drop(analyzer, f"{i}.csv", csv(rows))
            site.wait_taken()
        site.drop("line1", "bad.csv", "no header at all\n")
        site.drop("line2", "some.csv", csv([("check", "2026-01-20T06:00:00Z", "protein", "wheat-low", "10.6"),
                                            ("check", "2026-01-20T07:00:00Z", "protein", "wheat-low", "ten")]))
        site.wait_taken()
        first = site.get("/api/files?limit=3")
        self.assertEqual(len(first["files"]), 3)
        site.drop("line1", "later.csv", csv(plant.checks(10, 1)["line1"]))
        site.wait_taken()
        ids = [int(f["id"]) for f in first["files"]]
        ids += [int(f["id"]) for f in self.pages(site, "/api/files?limit=3", "files", first["next"])]
        self.assertEqual(ids, sorted(set(ids), reverse=True))
        self.assertEqual(len(ids), 10)
        [bad] = site.get("/api/files?outcome=rejected")["files"]
        self.assertEqual((bad["analyzer"], bad["name"], bad["size"]), ("line1", "bad.csv", 17))
        self.assertTrue(bad["reason"])
        [some] = [f for f in site.get("/api/files?outcome=done&analyzer=line2")["files"] if f["name"] == "some.csv"]
        self.assertEqual(some["rows"], {"accepted": 1, "repeated": 0, "rejected": 1})
        self.assertEqual(some["rejected_rows"][0]["line"], 3)

    def test_all_readings_can_be_taken_out_as_json_and_as_csv(self):
        site = self.make_site().start()
        plant = Plant(seed=6)
        sent = set()
        for source in (plant.checks(0, 6), plant.splits(0, 9)):
            for analyzer, rows in source.items():
                site.drop(analyzer, f"{len(sent)}.csv", csv(rows))
                sent |= {(analyzer, kind, at, measurand, item, value) for kind, at, measurand, item, value in rows}
        odd = [("split", "2026-01-20T06:00:00Z", "protein", "=1+1", "<0.05"),
               ("split", "2026-01-20T07:00:00Z", "protein", "S-1", "11.5")]
        site.drop("line1", "odd.csv", csv(odd))
        site.wait_taken()
        site.drop("line1", "void.csv", csv([("void", "2026-01-20T07:00:00Z", "protein", "S-1", "")]))
        site.wait_taken()
        site.drop("line1", "again.csv", csv([("split", "2026-01-20T07:00:00Z", "protein", "S-1", "11.6")]))
        site.wait_taken()

        rows = self.pages(site, "/api/readings?limit=7", "readings")
        of_plant = {(r["analyzer"], r["kind"], r["measured_at"], r["measurand"], r["item"], r["value"])
                    for r in rows if r["measured_at"] < "2026-01-20"}
        self.assertEqual(of_plant, sent)
        self.assertEqual(len(rows), len(sent) + 3)
        old, new = [r for r in rows if r["item"] == "S-1"]
        self.assertEqual([(r["value"], r["voided"], r["corrected"], r["revision"]) for r in (old, new)],
                         [(11.5, True, True, 0), (11.6, False, False, 1)])
        [computed] = self.pages(site, "/api/readings?sample=%3D1%2B1", "readings")
        self.assertEqual((computed["censored"], computed["value"]), ("below", 0.05))
        self.assertEqual(len(self.pages(site, "/api/readings?analyzer=line2&standard=wheat-low&limit=2", "readings")), 6)

        path, taken = "/api/readings?limit=7", []
        while path:
            status, headers, body = site.request(path, headers={"Accept": "text/csv"})
            self.assertEqual(status, 200)
            self.assertTrue(headers["Content-Type"].startswith("text/csv"), headers)
            taken += list(csv_module.DictReader(io.StringIO(body.decode(), newline="")))
            link = headers.get("Link")
            self.assertRegex(link or '<x>; rel="next"', r'^<[^<>"]+>; rel="next"$')
            path = link[1:link.index(">")] if link else None
        self.assertEqual(len(taken), len(rows))
        for cell, row in zip(taken, rows):
            self.assertEqual(cell["item"].removeprefix("'"), row["item"])
            self.assertEqual(float(cell["value"].lstrip("<>")), row["value"])
            for name in ("analyzer", "kind", "measured_at", "measurand", "received_at"):
                self.assertEqual(cell[name], row[name])
        self.assertIn("'=1+1", [c["item"] for c in taken])

    def test_wrong_questions_are_answered_with_what_was_expected(self):
        site = self.make_site().start()
        for path, expected in (("/api/files?outcome=good", "done, repeated"), ("/api/files?analyzer=line11", "line1"),
                               ("/api/readings?kind=void", "check or split"), ("/api/readings?measurand=protien", "protein"),
                               ("/api/readings?analyser=line1", "analyzer"), ("/api/readings?after=x", "next"),
                               ("/api/readings?limit=5001", "5000")):
            status, headers, body = site.request(path)
            self.assertEqual((status, headers["Content-Type"]), (400, "application/problem+json"), path)
            self.assertIn(expected, json.loads(body)["detail"])

    def test_alerts_are_walked_by_cursor(self):
        site = self.make_site().start()
        for analyzer in ("line1", "line2"):
            site.drop(analyzer, "bad.csv", "no header at all\n")
        site.wait_taken()
        alerts = self.pages(site, "/api/alerts?limit=1", "alerts")
        self.assertEqual({a["subject"].get("analyzer") for a in alerts if a["kind"] == "file_rejected"}, {"line1", "line2"})
        ids = [int(a["id"]) for a in alerts]
        self.assertEqual(ids, sorted(set(ids), reverse=True))
