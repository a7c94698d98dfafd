"""Alerts that arrive: told once, signed, in order, whatever the receiver does."""
import hashlib

from harness import SiteTest, free_port, wait_until
from plant import START, Plant, csv, rfc3339


def drop_history(site, plant, rounds, first=0):
    checks, splits = plant.checks(first, rounds), plant.splits(first * 4, rounds * 4)
    for analyzer in checks:
        rows = sorted(checks[analyzer] + splits[analyzer], key=lambda r: r[1])
        site.drop(analyzer, f"{first:04d}.csv", csv(rows))
    site.wait_taken()


class Webhooks(SiteTest):
    def test_a_drift_of_line2_is_caught_and_told_with_all_that_matters(self):
        receiver = self.make_receiver()
        site = self.make_site(receiver_port=receiver.port, decimals=3).start()
        # Up by 0.35 g/100 g within six days, then steady. The seed is one without a false alert in its calm month.
        plant = Plant(seed=14, drift=lambda hours: min(0.35, max(0.0, (hours - 30 * 24) * 0.0025)))
        drop_history(site, plant, 90)
        self.assertEqual(site.get("/api/comparisons/protein")["verdict"], "agreement_shown")
        self.assertEqual(site.get("/api/status")["overall"], "ok", site.get("/api/alerts")["alerts"])
        drop_history(site, plant, 30, first=90)
        lost = wait_until(lambda: receiver.events("agreement_lost"), "agreement_lost arrives")[0]
        self.assertEqual(lost["type"], "agreed.alert.opened")
        self.assertEqual(lost["specversion"], "1.0")
        self.assertEqual(lost["data"]["severity"], "critical")
        self.assertEqual(lost["data"]["subject"], {"comparison": "protein"})
        self.assertTrue(lost["source"].startswith("urn:uuid:"))
        self.assertEqual(lost["subject"], lost["data"]["id"])
        for word in ("line2", "g/100 g", "0.2"):
            self.assertIn(word, lost["data"]["text"])
        unstable = wait_until(lambda: receiver.events("check_standard_unstable"), "check_standard_unstable arrives")
        self.assertTrue(all(e["data"]["subject"]["analyzer"] == "line2" for e in unstable), unstable)
        self.assertTrue(receiver.events("agreement_drifting"))
        self.assertTrue(all(g["signed"] for g in receiver.got))
        self.assertTrue(all(g["headers"]["webhook-id"] == g["event"]["id"] for g in receiver.got))
        self.assertEqual(len({g["event"]["id"] for g in receiver.got}), len(receiver.got))
        status = site.get("/api/status")
        self.assertEqual(status["overall"], "alert")
        self.assertEqual(status["comparisons"][0]["verdict"], "disagreement_shown")
        alert = site.get(f"/api/alerts/{lost['data']['id']}")
        self.assertIn(lost["data"]["title"], [step["title"] for step in alert["history"]], "one wording for webhook and API")
        wait_until(lambda: all(d["state"] == "delivered" for d in site.get(f"/api/alerts/{alert['id']}")["deliveries"]),
                   "every message is marked delivered")
        self.assertIn(alert["title"].encode(), site.request("/")[2])

    def test_a_receiver_that_fails_and_comes_back_gets_everything_once_in_order(self):
        receiver = self.make_receiver()
        receiver.answer = lambda n: 500 if n < 2 else 204
        site = self.make_site(receiver_port=receiver.port).start()
        for i in range(3):
            site.drop("line1" if i % 2 else "line2", f"bad{i}.csv", "nonsense\n")
        site.wait_taken()
        wait_until(lambda: len(receiver.events()) >= 2, "both alerts arrive")
        ids = [g["event"]["id"] for g in receiver.got]
        self.assertEqual(ids[0], ids[1], "the id is the same over all tries")
        self.assertEqual(ids[1], ids[2])
        accepted = [e["id"] for e in receiver.events()]
        self.assertEqual(len(set(accepted)), len(accepted))

    def test_a_receiver_that_is_down_over_a_restart(self):
        port = free_port()
        site = self.make_site(receiver_port=port).start()
        site.drop("line1", "bad.csv", "nonsense\n")
        site.wait_taken()
        self.assertEqual([a["kind"] for a in site.get("/api/alerts")["alerts"]], ["file_rejected"])
        site.kill()
        receiver = self.make_receiver(port=port)
        site.start()
        events = wait_until(lambda: receiver.events("file_rejected"), "the alert arrives after the restart")
        self.assertEqual(len(events), 1)
        wait_until(lambda: site.get("/api/alerts/1")["deliveries"][0]["state"] == "delivered", "it is marked delivered")

    def test_acknowledging_needs_the_operators_token_and_is_told(self):
        receiver = self.make_receiver()
        site = self.make_site(receiver_port=receiver.port)
        tokens = site.folder / "tokens"
        lines = [f"{role} {name} {hashlib.sha256(token.encode()).hexdigest()}"
                 for role, name, token in (("operator", "shift", "open-sesame"), ("reader", "wall", "look-only"))]
        tokens.write_text("\n".join(lines) + "\n")
        site.config.write_text(site.config.read_text() + "access: {tokens_file: tokens}\n")
        site.start()
        checks = [("check", rfc3339(START + i * 3600), "protein", "wheat-low", round(10.6 + 0.01 * (i % 3), 2)) for i in range(30)]
        checks += [("check", rfc3339(START + i * 3600), "protein", "wheat-low", 11.4) for i in range(30, 33)]
        site.drop("line1", "step.csv", csv(checks))
        wait_until(lambda: receiver.events("check_standard_unstable"), "the step is told")
        body = '{"by": "K. Byrne", "note": "cell cleaned"}'

        def ask(token):
            return site.request("/api/alerts/1/acknowledge", "POST", body,
                                {"Authorization": f"Bearer {token}", "Content-Type": "application/json"})[0]
        self.assertEqual(ask("wrong"), 401)
        self.assertEqual(ask("look-only"), 403)
        self.assertIn(ask("open-sesame"), (200, 204))
        told = wait_until(lambda: receiver.events(type_="agreed.alert.acknowledged"), "the acknowledgement is told")[0]
        self.assertEqual(told["data"]["acknowledged"]["by"], "K. Byrne")
        self.assertEqual(site.get("/api/status")["alerts"], {"open": 0, "acknowledged": 1})
        alert = site.get("/api/alerts/1")
        self.assertEqual((alert["state"], alert["acknowledged"]["note"]), ("acknowledged", "cell cleaned"))
        self.assertNotIn("open-sesame", (site.folder / "log").read_text())
