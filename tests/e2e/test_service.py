"""Starting, stopping, refusing, and the HTTP contract of the running service."""
import json
import pathlib
import subprocess
import tempfile

from harness import AGREED, SiteTest, wait_until
from plant import Plant, csv


def agreed(*arguments):
    return subprocess.run([AGREED, *map(str, arguments)], capture_output=True, text=True, timeout=60)


class Service(SiteTest):
    def test_sigterm_ends_it_cleanly_within_two_seconds_and_nothing_is_lost(self):
        site = self.make_site().start()
        plant = Plant(seed=3)
        rows = plant.checks(0, 10)
        for analyzer in rows:
            site.drop(analyzer, "a.csv", csv(rows[analyzer]))
        site.wait_taken()
        before = site.get("/api/charts")
        code, seconds = site.stop()
        self.assertEqual(code, 0)
        self.assertLess(seconds, 2.0)
        site.start()
        self.assertEqual(site.get("/api/charts"), before)

    def test_two_services_on_one_state_folder_the_second_refuses_and_says_why(self):
        site = self.make_site().start()
        second = agreed("run", site.config)
        self.assertEqual(second.returncode, 3)
        self.assertIn(str(site.process.pid), second.stderr)
        self.assertIn("state", second.stderr)
        self.assertEqual(site.status_code("/health/live"), 200)

    def test_a_port_in_use_is_an_error(self):
        site = self.make_site().start()
        port = int(site.base.rsplit(":", 1)[1])
        other = self.make_site(port=port)
        refused = agreed("run", other.config)
        self.assertEqual(refused.returncode, 3)
        self.assertIn(str(port), refused.stderr)
        self.assertIn("in use", refused.stderr)

    def test_a_wrong_configuration_tells_every_error_with_its_place(self):
        site = self.make_site()
        text = site.config.read_text().replace("unit: g/100 g", "unti: g/100 g").replace("every: 2h", "every: 2 hours")
        site.config.write_text(text)
        for command in ("check", "run"):
            answer = agreed(command, site.config)
            self.assertEqual(answer.returncode, 2, command)
            said = answer.stdout + answer.stderr
            self.assertIn("unit", said)
            self.assertRegex(said, r"agreed\.yaml:\d+:\d+: measurands\.protein\.unti")
            self.assertRegex(said, r"agreed\.yaml:\d+:\d+: comparisons\.protein\.every")

    def test_check_version_help_and_mistyped_commands(self):
        site = self.make_site()
        answer = agreed("check", site.config)
        self.assertEqual(answer.returncode, 0, answer.stderr)
        self.assertIn("wheat-low", answer.stdout)
        self.assertRegex(agreed("--version").stdout, r"^agreed \d+\.\d+\.\d+\n$")
        self.assertIn("run", agreed("--help").stdout)
        self.assertIn("Example", agreed("run", "--help").stdout)
        typo = agreed("chekc", "x")
        self.assertEqual(typo.returncode, 2)
        self.assertIn("check", typo.stderr)
        self.assertEqual(agreed().returncode, 2)
        self.assertEqual(agreed("run", "/nowhere/agreed.yaml").returncode, 2)

    def test_the_example_is_complete_and_works(self):
        folder = pathlib.Path(tempfile.mkdtemp()) / "mill"
        self.assertEqual(agreed("example", folder).returncode, 0)
        self.assertEqual(agreed("check", folder / "agreed.yaml").returncode, 0)
        self.assertEqual(agreed("example", folder).returncode, 3, "it overwrites nothing")
        site = self.make_site()
        text = (folder / "agreed.yaml").read_text().replace("7480", "0")
        (folder / "agreed.yaml").write_text(text)
        site.config = folder / "agreed.yaml"
        site.start()
        wait_until(lambda: site.get("/api/status")["intake"]["readings"]["accepted"] > 0, "the day's files are taken in")
        self.assertEqual(site.get("/api/status")["intake"]["readings"]["rejected"], 0)

    def test_every_configured_chart_and_comparison_exists_from_the_start(self):
        site = self.make_site().start()
        charts = site.get("/api/charts")["charts"]
        self.assertEqual(len(charts), 4)
        self.assertTrue(all(c["state"] == "learning" and c["points"] == [] and c["change"]["score"] is None for c in charts))
        comparison = site.get("/api/comparisons")["comparisons"][0]
        self.assertEqual((comparison["verdict"], comparison["pairs"]), ("gathering", []))
        self.assertIsNone(comparison["fit"])
        self.assertEqual(site.get("/api/status")["overall"], "attention")

    def test_etags_errors_and_headers(self):
        site = self.make_site().start()
        status, headers, body = site.request("/api/charts")
        etag = headers["ETag"]
        self.assertEqual(site.request("/api/charts", headers={"If-None-Match": etag})[0], 304)
        self.assertEqual(site.request("/api/charts", headers={"If-None-Match": '"other"'})[0], 200)
        self.assertEqual(headers["X-Content-Type-Options"], "nosniff")
        self.assertIn("default-src 'self'", headers["Content-Security-Policy"])
        for path, code in (("/api/charts/line1/wheat-low/nothing", 404), ("/api/comparisons/protein?pairs=0", 400),
                           ("/api/comparisons/none?pairs=x", 400), ("/api/nothing", 404), ("/../etc/passwd", 404),
                           ("/api/alerts/999", 404)):
            status, headers, body = site.request(path)
            self.assertEqual(status, code, path)
            self.assertEqual(headers["Content-Type"].split(";")[0], "application/problem+json")
            self.assertEqual(json.loads(body)["status"], code)
        self.assertEqual(site.request("/api/alerts/1/acknowledge", "POST", "{}")[0], 401)

    def test_the_page_shows_the_verdict_and_every_chart(self):
        site = self.make_site().start()
        status, headers, body = site.request("/")
        self.assertEqual(status, 200)
        self.assertIn("text/html", headers["Content-Type"])
        page = body.decode()
        self.assertIn("Harrow Mill", page)
        self.assertIn("not a release decision", page)
        for path in ("/comparisons/protein", "/charts/line1/wheat-low/protein", "/alerts"):
            self.assertEqual(site.request(path)[0], 200, path)
        self.assertEqual(site.request("/charts/line1/wheat-low/none")[0], 404)
