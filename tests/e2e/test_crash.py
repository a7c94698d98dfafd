"""kill -9 again and again while files arrive: nothing lost, nothing doubled, every open alert told."""
import os
import random
import threading
import time

from harness import SiteTest, wait_until
from plant import Plant, csv

KILLS = int(os.environ.get("AGREED_KILLS", "30"))
SEED = int(os.environ.get("AGREED_SEED", "20260105"))


def files():
    """What the plant writes in 40 days: one file a shift and analyzer, with a drift of line2 in the last ten."""
    plant = Plant(seed=5, drift=lambda hours: max(0.0, (hours - 30 * 24) * 0.0025))
    for i in range(120):
        checks, splits = plant.checks(i, 1), plant.splits(i * 4, 4)
        for analyzer in checks:
            rows = sorted(checks[analyzer] + splits[analyzer], key=lambda r: r[1])
            if i % 17 == 5:
                rows.append(("check", "yesterday", "protein", "wheat-low", 10.6))  # a bad row now and then
            yield analyzer, f"shift-{i:03d}.csv", csv(rows)


def final_state(site):
    charts = [site.get(f"/api/charts/{a}/{s}/protein?points=500") for a in ("line1", "line2") for s in ("wheat-low", "wheat-high")]
    comparison = site.get("/api/comparisons/protein?pairs=500")
    alerts = site.get("/api/alerts?state=open,acknowledged&limit=500")["alerts"]
    subjects = sorted((a["kind"], str(a["subject"]), a["severity"]) for a in alerts)
    return charts, comparison, subjects, site.get("/api/status")["intake"]["readings"]


class Crash(SiteTest):
    def run_site(self, disturbed):
        receiver = self.make_receiver()
        site = self.make_site(receiver_port=receiver.port, decimals=3).start()
        feed = threading.Thread(target=self.feed, args=(site, 0.1 if disturbed else 0.0))
        feed.start()
        chance = random.Random(SEED)
        for _ in range(KILLS if disturbed else 0):
            time.sleep(chance.choice([chance.uniform(0.0, 0.1), chance.uniform(0.0, 1.2)]))
            site.kill()
            site.start(wait_ready=chance.random() < 0.5)
        feed.join()
        wait_until(lambda: site.status_code("/health/ready") == 200, "it is ready")
        site.wait_taken(seconds=120)
        return site, receiver

    @staticmethod
    def feed(site, pause):
        for analyzer, name, text in files():
            site.drop(analyzer, name, text)
            time.sleep(pause)

    def test_thirty_kills_change_nothing_in_the_end(self):
        print(f"seed {SEED}, {KILLS} kills")
        calm, calm_receiver = self.run_site(disturbed=False)
        site, receiver = self.run_site(disturbed=True)
        expected, found = final_state(calm), final_state(site)
        for what, e, f in zip(("charts", "comparison", "open alerts", "readings"), expected, found):
            self.assertEqual(f, e, what)
        self.assertTrue(found[2], "the drift is an open alert")
        self.every_open_alert_was_told(site, receiver)
        done = [p for a in ("line1", "line2") for p in site.files_in(a, "done")]
        self.assertEqual(len(done), 240)

    def every_open_alert_was_told(self, site, receiver):
        def told():
            return {e["subject"] for e in receiver.events(type_="agreed.alert.opened")}
        open_ids = {a["id"] for a in site.get("/api/alerts?state=open&limit=500")["alerts"]}
        wait_until(lambda: open_ids <= told(), "every open alert was told")
        # One id a message: the same id always carries the same body, and no opening has two ids.
        bodies = {}
        for got in receiver.got:
            self.assertEqual(bodies.setdefault(got["headers"]["webhook-id"], got["body"]), got["body"])
        openings = {}
        for event in receiver.events(type_="agreed.alert.opened"):
            openings.setdefault((event["subject"], event["time"]), set()).add(event["id"])
        self.assertTrue(all(len(ids) == 1 for ids in openings.values()), openings)
