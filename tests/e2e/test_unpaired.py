"""A half of a split sample whose other half does not come in time is told of, once; it still counts when the other comes."""
import hashlib

from harness import CONFIG, SiteTest, wait_until
from plant import csv

TOKEN = "o" * 30


class Unpaired(SiteTest):
    def half(self, site, analyzer, sample, second=0):
        site.drop(analyzer, f"{sample}.csv", csv([("split", f"2026-01-05T06:00:{second:02d}Z", "protein", sample, "11.2")]))
        site.wait_taken()

    def alerts(self, site, state="open"):
        return [a for a in site.get(f"/api/alerts?state={state}")["alerts"] if a["kind"] == "unpaired_samples"]

    def items(self, site):
        return {a["subject"]["analyzer"]: a["details"]["items"] for a in self.alerts(site)}

    def test_lonely_halves_are_told_collected_and_acknowledged(self):
        config = CONFIG.format(port=0, rescan="1s", decimals=2, routes="    []")
        config = config.replace("y: line2, every: 2h}", "y: line2, every: 2h, pair_within: 3s}") + "access: {tokens_file: tokens}\n"
        site = self.make_site(config=config)
        (site.folder / "tokens").write_text(f"operator shift {hashlib.sha256(TOKEN.encode()).hexdigest()}\n")
        site.start()
        self.half(site, "line2", "S-1")
        site.drop("line1", "S-2.csv", "kind,measured_at,measurand,item,x,y,comparison\n"
                                      "split,2026-01-05T06:00:00Z,protein,S-2,11.2,11.3,protein\n")
        wait_until(lambda: self.items(site) == {"line2": ["S-1"]}, "S-1 is told of, and the pair is not")
        self.half(site, "line2", "S-3")
        wait_until(lambda: self.items(site) == {"line2": ["S-1", "S-3"]}, "S-3 is added to it")
        [alert] = self.alerts(site)
        self.assertEqual((alert["severity"], alert["details"]["count"]), ("notice", 2))
        self.assertIn("S-3", alert["text"])
        pairs = site.get("/api/comparisons/protein")["pairs_total"]
        self.half(site, "line1", "S-1", second=2)
        self.assertEqual(site.get("/api/comparisons/protein")["pairs_total"], pairs + 1, "it still counts when its partner comes")
        status, _, _ = site.request(f"/api/alerts/{alert['id']}/acknowledge", "POST", '{"by": "K. Byrne"}', {"Authorization": f"Bearer {TOKEN}"})
        self.assertEqual(status, 200)
        self.assertEqual(self.alerts(site, "resolved")[0]["id"], alert["id"])

        # What waited when the service was killed is told of by the next one, and by no further one.
        self.half(site, "line1", "S-4")
        site.kill()
        site.start()
        wait_until(lambda: self.items(site) == {"line1": ["S-4"]}, "S-4 is told of after the restart")
        before = self.alerts(site)
        site.kill()
        site.start()
        self.half(site, "line2", "S-5")
        wait_until(lambda: self.items(site).get("line2") == ["S-5"], "a later one is told of")
        self.assertEqual([a for a in self.alerts(site) if a["id"] == before[0]["id"]], before)
