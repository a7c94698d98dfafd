"""What becomes of files: good, bad, repeated, half-written."""
import time

from harness import SiteTest, wait_until
from plant import HEADER, START, Plant, csv, rfc3339


def check(i, value, standard="wheat-low"):
    return ("check", rfc3339(START + i * 3600), "protein", standard, value)


class Files(SiteTest):
    def setUp(self):
        self.site = self.make_site().start()

    def readings(self):
        return self.site.get("/api/status")["intake"]["readings"]

    def points(self, standard="wheat-low", analyzer="line1"):
        return self.site.get(f"/api/charts/{analyzer}/{standard}/protein?points=500")["points"]

    def test_a_good_a_bad_and_a_repeated_row_in_one_file(self):
        self.site.drop("line1", "first.csv", csv([check(0, 10.61)]))
        self.site.wait_taken()
        self.site.drop("line1", "mixed.csv", csv([check(1, 10.62), check(2, "1,5"), check(0, 10.61)]))
        self.site.wait_taken()
        self.assertEqual(self.readings(), {"accepted": 2, "repeated": 1, "rejected": 1, "voided": 0, "censored": 0})
        self.assertEqual([p["value"] for p in self.points()], [10.61, 10.62])
        self.assertEqual(self.site.files_in("line1", "done"), ["first.csv", "mixed.csv"])
        alerts = self.site.get("/api/alerts?state=open")["alerts"]
        self.assertEqual([a["kind"] for a in alerts], ["file_rejected"])
        self.assertIn("mixed.csv", alerts[0]["text"])
        self.assertEqual(alerts[0]["subject"]["analyzer"], "line1")

    def test_binary_garbage_is_rejected_with_its_reason_beside_it(self):
        self.site.drop("line1", "noise.csv", bytes(range(256)) * 40)
        self.site.wait_taken()
        names = self.site.files_in("line1", "rejected")
        self.assertEqual(names, ["noise.csv", "noise.csv.reason.txt"])
        self.assertEqual(self.site.get("/api/status")["intake"]["files"], {"done": 0, "repeated": 0, "rejected": 1})
        self.assertEqual(self.readings()["accepted"], 0)

    def test_an_empty_file_waits_and_harms_nobody(self):
        self.site.drop("line1", "empty.csv", "")
        self.site.drop("line1", "good.csv", csv([check(0, 10.6)]))
        wait_until(lambda: self.readings()["accepted"] == 1, "the file behind the empty one is taken in")
        self.assertIn("empty.csv", [p.name for p in self.site.inbox("line1").iterdir()])

    def test_a_writer_that_pauses_three_seconds_in_the_middle(self):
        text = csv([check(0, 10.61), check(1, 10.63)])
        with open(self.site.inbox("line1") / "slow.csv", "w") as file:
            file.write(text[: len(text) // 2])
            file.flush()
            time.sleep(3)
            self.assertEqual(self.readings()["accepted"], 0, "half a file must not be taken")
            file.write(text[len(text) // 2:])
        self.site.wait_taken()
        self.assertEqual(self.readings(), {"accepted": 2, "repeated": 0, "rejected": 0, "voided": 0, "censored": 0})

    def test_the_same_file_again_under_another_name(self):
        text = csv([check(0, 10.61), check(1, 10.63)])
        self.site.drop("line1", "one.csv", text)
        self.site.wait_taken()
        chart = self.site.request("/api/charts/line1/wheat-low/protein")[2]
        self.site.drop("line1", "two.csv", text)
        self.site.wait_taken()
        self.assertEqual(self.site.get("/api/status")["intake"]["files"], {"done": 1, "repeated": 1, "rejected": 0})
        self.assertEqual(self.site.request("/api/charts/line1/wheat-low/protein")[2], chart)
        self.assertEqual(self.site.files_in("line1", "done"), ["one.csv", "two.csv"])

    def test_the_same_name_with_another_content_overwrites_nothing(self):
        self.site.drop("line1", "day.csv", csv([check(0, 10.61)]))
        self.site.wait_taken()
        self.site.drop("line1", "day.csv", csv([check(1, 10.62)]))
        self.site.wait_taken()
        self.assertEqual(len(self.site.files_in("line1", "done")), 2)
        self.assertEqual(self.readings()["accepted"], 2)

    def test_json_lines_arrays_and_pairs_in_one_row(self):
        self.site.drop("line1", "a.jsonl", '{"kind":"check","measured_at":"2026-01-05T06:00:00Z","measurand":"protein",'
                                           '"item":"wheat-low","value":10.61}\n')
        self.site.drop("line1", "b.json", '[{"kind":"split","measured_at":"2026-01-05T06:00:00Z","measurand":"protein",'
                                          '"item":"S-1","x":11.2,"y":11.3,"comparison":"protein"}]')
        self.site.wait_taken()
        self.assertEqual(self.readings()["accepted"], 3)
        pairs = self.site.get("/api/comparisons/protein")["pairs"]
        self.assertEqual([(p["sample"], p["x"], p["y"]) for p in pairs], [("S-1", 11.2, 11.3)])

    def test_a_conflict_stands_a_void_and_a_correction(self):
        self.site.drop("line1", "1.csv", csv([check(0, 10.61)]))
        self.site.wait_taken()
        self.site.drop("line1", "2.csv", csv([check(0, 10.99)]))
        self.site.wait_taken()
        self.assertEqual([p["value"] for p in self.points()], [10.61])
        self.assertEqual(self.readings()["rejected"], 1)
        self.site.drop("line1", "3.csv", csv([("void",) + check(0, "")[1:]]))
        self.site.wait_taken()
        self.assertEqual(self.points(), [])
        self.site.drop("line1", "4.csv", csv([check(0, 10.65)]))
        self.site.wait_taken()
        self.assertEqual([p["value"] for p in self.points()], [10.65])
        self.assertEqual(self.readings()["voided"], 1)

    def test_a_censored_check_is_kept_and_counted_on_its_chart_and_left_out(self):
        self.site.drop("line1", "1.csv", csv([check(0, 10.61), check(1, "<5"), check(2, ">20")]))
        self.site.wait_taken()
        self.assertEqual([p["value"] for p in self.points()], [10.61])
        self.assertEqual(self.readings()["censored"], 2)
        chart = "/api/charts/line1/wheat-low/protein"
        self.assertEqual(self.site.get(chart)["censored"], 2)
        self.assertIn("2 results only say", self.site.request("/charts/line1/wheat-low/protein")[2].decode())
        self.site.drop("line1", "2.csv", csv([("void",) + check(1, "")[1:]]))
        self.site.wait_taken()
        self.assertEqual(self.site.get(chart)["censored"], 1)
        self.site.kill()
        self.site.start()
        self.assertEqual(self.site.get(chart)["censored"], 1, "after a restart")

    def test_the_order_of_arrival_does_not_matter(self):
        plant = Plant(seed=7)
        checks, splits = plant.checks(0, 20), plant.splits(0, 30)
        rows = {a: checks[a] + splits[a] for a in checks}
        for analyzer in ("line2", "line1"):  # the later analyzer first, the newest rows first, one row a file
            for i, row in enumerate(reversed(rows[analyzer])):
                self.site.drop(analyzer, f"{i:03d}.csv", csv([row]))
        self.site.wait_taken()
        scrambled = self.pictures()
        other = self.make_site().start()
        for analyzer in ("line1", "line2"):
            other.drop(analyzer, "all.csv", csv(rows[analyzer]))
        other.wait_taken()
        self.site, first = other, self.site
        self.assertEqual(self.pictures(), scrambled)
        first.kill()
        first.start()
        self.site = first
        self.assertEqual(self.pictures(), scrambled, "after a restart")

    def pictures(self):
        return [self.site.get(f"/api/charts/{a}/{s}/protein?points=500") for a in ("line1", "line2")
                for s in ("wheat-low", "wheat-high")] + [self.site.get("/api/comparisons/protein?pairs=500")]

    def test_an_inbox_that_goes_and_comes_back(self):
        inbox = self.site.inbox("line1")
        inbox.rename(inbox.with_name("gone"))
        wait_until(lambda: not self.site.get("/api/status")["analyzers"][0]["inbox"]["reachable"], "its absence is told")
        self.assertFalse(inbox.exists(), "a missing inbox is reported, never created")
        inbox.mkdir()
        wait_until(lambda: self.site.get("/api/status")["analyzers"][0]["inbox"]["reachable"], "its return is noticed")
        self.site.drop("line1", "after.csv", csv([check(0, 10.6)]))
        self.site.wait_taken()
        self.assertEqual(self.readings()["accepted"], 1)

    def test_a_header_that_misses_a_column_says_which(self):
        self.site.drop("line2", "bad.csv", HEADER.replace(",value", "") + "\ncheck,2026-01-05T06:00:00Z,protein,wheat-low\n")
        self.site.wait_taken()
        reason = next((self.site.inbox("line2") / "rejected").rglob("*.reason.txt")).read_text()
        self.assertIn("value", reason)
