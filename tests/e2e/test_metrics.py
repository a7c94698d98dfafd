"""What a monitoring system scrapes, read by the reference parser of its format and held against the API."""
from datetime import datetime

from prometheus_client.openmetrics.parser import text_string_to_metric_families

from harness import CONFIG, SiteTest, wait_until
from plant import Plant, csv

ODD_SITE = r'Harrow Mill "North" \ 2'


class Metrics(SiteTest):
    def scrape(self, site):
        """Families by name. The parser refuses what the format forbids."""
        status, headers, body = site.request("/metrics")
        self.assertEqual(status, 200)
        self.assertEqual(headers["Content-Type"], "application/openmetrics-text; version=1.0.0; charset=utf-8")
        self.assertTrue(body.endswith(b"\n# EOF\n"))
        families = {f.name: f for f in text_string_to_metric_families(body.decode())}
        for family in families.values():
            self.assertTrue(family.name.startswith("agreed_") and family.documentation, family)
        return families

    def value(self, families, name, **labels):
        family = families[name]
        suffix = {"counter": "_total", "info": "_info"}.get(family.type, "")
        [sample] = [s for s in family.samples if s.labels == labels and s.name == name + suffix]
        return sample.value

    def test_every_number_is_that_of_the_status(self):
        receiver = self.make_receiver()
        receiver.answer = lambda n: 204 if n < 1 else 500
        config = CONFIG.format(port=0, rescan="1s", decimals=3, routes=(
            f"    - {{name: engineer, url: 'http://127.0.0.1:{receiver.port}/hook', secret_file: secret}}\n"
            "    - {name: night, url: 'http://127.0.0.1:9/hook', unsigned: true, kinds: [storage_low]}"))
        config = config.replace("site: Harrow Mill", f"site: '{ODD_SITE}'")
        site = self.make_site(config=config).start()
        empty = self.scrape(site)
        self.assertEqual(self.value(empty, "agreed_messages", route="night", state="waiting"), 0)
        self.assertEqual(self.value(empty, "agreed_intake_readings", outcome="accepted"), 0)

        plant = Plant(seed=14, drift=lambda hours: 0.5 if hours > 15 * 24 else 0.0)
        checks, splits = plant.checks(0, 60), plant.splits(0, 240)
        for analyzer in checks:
            site.drop(analyzer, "history.csv", csv(sorted(checks[analyzer] + splits[analyzer], key=lambda r: r[1])))
        site.drop("line1", "bad.csv", "nonsense\n")
        site.wait_taken()
        # The second message to the engineer is refused, and the rest waits behind it.
        wait_until(lambda: len(receiver.got) >= 2, "a message is refused")

        def same_moment():
            before, families = site.get("/api/status"), self.scrape(site)
            return (before, families) if site.get("/api/status")["at"] == before["at"] else None
        status, families = wait_until(same_moment, "status and metrics of one snapshot")
        value = lambda name, **labels: self.value(families, name, **labels)

        self.assertEqual(value("agreed_build", version=status["service"]["version"]), 1)
        self.assertEqual(value("agreed_configuration", site=status["site"], sha256=status["service"]["config_sha256"]), 1)
        self.assertEqual(status["site"], ODD_SITE)
        self.assertEqual(value("agreed_ready"), 1)
        self.assertEqual({s.labels["agreed_overall"] for s in families["agreed_overall"].samples if s.value == 1}, {status["overall"]})
        for outcome, count in status["intake"]["files"].items():
            self.assertEqual(value("agreed_intake_files", outcome=outcome), count)
        for outcome, count in status["intake"]["readings"].items():
            if outcome in ("voided", "censored"):
                self.assertEqual(value(f"agreed_intake_readings_{outcome}"), count)
            else:
                self.assertEqual(value("agreed_intake_readings", outcome=outcome), count)
        self.assertEqual(value("agreed_intake_readings", outcome="accepted"), 60 * 4 + 240 * 2)
        self.assertEqual(value("agreed_intake_pending_files"), status["intake"]["pending_files"])
        for name, at in (("agreed_start_time_seconds", status["service"]["started_at"]), ("agreed_snapshot_time_seconds", status["at"]),
                         ("agreed_intake_last_commit_time_seconds", status["intake"]["last_commit_at"])):
            self.assertEqual(families[name].unit, "seconds")
            self.assertAlmostEqual(value(name), seconds(at), places=3)
        for analyzer in status["analyzers"]:
            self.assertEqual(value("agreed_inbox_reachable", analyzer=analyzer["id"]), 1)
            self.assertEqual(value("agreed_inbox_pending_files", analyzer=analyzer["id"]), analyzer["inbox"]["pending"])
            self.assertAlmostEqual(value("agreed_analyzer_last_reading_time_seconds", analyzer=analyzer["id"]),
                                   seconds(analyzer["last_reading_at"]), places=3)
            for state, count in analyzer["charts"].items():
                self.assertEqual(value("agreed_analyzer_charts", analyzer=analyzer["id"], state=state), count)
        self.assert_comparison(families, site.get("/api/comparisons/protein"))
        self.assert_alerts(families, site)
        self.assertEqual(value("agreed_chain_sequence"), status["chain"]["sequence"])
        self.assertEqual(value("agreed_alarm_budget_alerts_per_year"), 6)
        for kind, expected in status["alarm_budget"]["by_kind"].items():
            self.assertAlmostEqual(value("agreed_alarm_budget_expected_alerts_per_year", kind=kind), expected, places=9)

    def assert_comparison(self, families, comparison):
        states = {s.labels["agreed_comparison_verdict"]: s.value for s in families["agreed_comparison_verdict"].samples}
        self.assertEqual(states, {v: float(v == comparison["verdict"]) for v in
                                  ("gathering", "agreement_shown", "inconclusive", "disagreement_shown")})
        self.assertEqual(comparison["verdict"], "disagreement_shown")
        self.assertEqual(self.value(families, "agreed_comparison_window_pairs", comparison="protein"), comparison["window"]["pairs"])
        self.assertAlmostEqual(self.value(families, "agreed_comparison_verdict_since_time_seconds", comparison="protein"),
                               seconds(comparison["verdict_since"]), places=3)
        for level in comparison["levels"]:
            for name, field in (("bias", "bias"), ("bias_low", "low"), ("bias_high", "high"), ("allowable_difference", "allowable")):
                [sample] = [s for s in families["agreed_comparison_" + name].samples if float(s.labels["level"]) == level["level"]]
                self.assertEqual(sample.value, level[field])

    def assert_alerts(self, families, site):
        open_ = {}
        for alert in site.get("/api/alerts?state=open,acknowledged&limit=500")["alerts"]:
            key = (alert["kind"], alert["severity"], alert["state"])
            open_[key] = open_.get(key, 0) + 1
        self.assertGreaterEqual(len(open_), 3)
        samples = {(s.labels["kind"], s.labels["severity"], s.labels["state"]): s.value for s in families["agreed_alerts"].samples}
        self.assertEqual({key: count for key, count in samples.items() if count}, open_)
        self.assertEqual(self.value(families, "agreed_messages", route="engineer", state="delivered"), 1)
        self.assertGreaterEqual(self.value(families, "agreed_messages", route="engineer", state="waiting"), 2)


def seconds(rfc3339):
    return datetime.fromisoformat(rfc3339.replace("Z", "+00:00")).timestamp()
