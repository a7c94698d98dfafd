"""SIGHUP: the configuration is read again while the service runs."""
import hashlib
import json
import os
import pathlib
import re
import shutil
import signal
import socket
import tempfile
import threading
import time

import harness
from harness import SiteTest, wait_until
from plant import Plant, csv

THIRD_STANDARD = "  rye: {every: 8h, measurands: {protein: {}}}\ncomparisons:"


class ReloadTest(SiteTest):
    def hang_up(self, site):
        site.process.send_signal(signal.SIGHUP)

    def write(self, site, text):
        """As a careful editor does: the service may read at any moment."""
        beside = site.config.with_suffix(".new")
        beside.write_text(text)
        os.rename(beside, site.config)
        return hashlib.sha256(text.encode()).hexdigest()

    def in_force(self, site, sha256, seconds=None):
        wait_until(lambda: site.get("/api/status")["service"]["config_sha256"] == sha256, "the configuration is in force",
                   seconds)
        wait_until(lambda: site.status_code("/health/ready") == 200, "the service is ready again")

    def reload(self, site, text):
        sha256 = self.write(site, text)
        self.hang_up(site)
        self.in_force(site, sha256)
        return sha256

    def remarks(self, site):
        return site.get("/health/ready")["remarks"]

    def log(self, site):
        return (site.folder / "log").read_text()

    def alerts(self, site, state="open,acknowledged,resolved"):
        return site.get(f"/api/alerts?state={state}")["alerts"]

    def month(self, site, drift=lambda hours: 0.0, pairs=120):
        plant = Plant(seed=11, drift=drift)
        for part in (plant.checks(0, 45), plant.splits(0, pairs)):
            for analyzer, rows in part.items():
                site.drop(analyzer, f"{rows[0][0]}.csv", csv(rows))
        site.wait_taken()


class Reload(ReloadTest):
    def test_what_was_added_and_taken_away_is_there_at_once_and_the_rest_goes_on(self):
        site = self.make_site().start()
        self.month(site)
        before = site.get("/api/charts/line1/wheat-low/protein?points=500")
        started_at = site.get("/api/status")["service"]["started_at"]
        (site.folder / "drop" / "line3").mkdir()
        text = site.config.read_text().replace("measurands:\n  protein", "  line3: {inbox: drop/line3, settle: 200ms, rescan: 1s}\n"
                                               "measurands:\n  protein", 1)
        self.reload(site, text)
        status = site.get("/api/status")
        self.assertEqual([a["id"] for a in status["analyzers"]], ["line1", "line2", "line3"])
        self.assertEqual(status["service"]["started_at"], started_at, "the service was not started again")
        after = site.get("/api/charts/line1/wheat-low/protein?points=500")
        self.assertEqual([p["value"] for p in after["points"]], [p["value"] for p in before["points"]])
        Plant(seed=5)
        site.drop("line3", "a.csv", csv([("check", "2026-02-01T06:00:00Z", "protein", "wheat-low", 10.6)]))
        wait_until(lambda: len(site.get("/api/charts/line3/wheat-low/protein")["points"]) == 1, "line3 is watched")

        self.reload(site, text.replace("  line2: {inbox: drop/line2, settle: 200ms, rescan: 1s}\n", "").replace(
            "comparisons:\n  protein: {measurand: protein, x: line1, y: line2, every: 2h}", "comparisons: {}"))
        self.assertEqual([a["id"] for a in site.get("/api/status")["analyzers"]], ["line1", "line3"])
        site.drop("line2", "late.csv", csv([("check", "2026-02-01T06:00:00Z", "protein", "wheat-low", 10.6)]))
        site.drop("line1", "late.csv", csv([("check", "2026-02-01T06:00:00Z", "protein", "wheat-low", 10.6)]))
        wait_until(lambda: not (site.inbox("line1") / "late.csv").exists(), "line1 goes on")
        self.assertTrue((site.inbox("line2") / "late.csv").exists(), "nobody watches line2 any more")
        self.assertEqual(site.stop()[0], 0)

    def test_what_cannot_be_used_is_told_with_every_place_and_the_old_one_goes_on(self):
        site = self.make_site().start()
        right = site.config.read_text()
        sha256 = site.get("/api/status")["service"]["config_sha256"]
        self.write(site, right.replace("unit: g/100 g", "unti: g/100 g").replace("every: 2h", "every: 2 hours"))
        self.hang_up(site)
        remark = wait_until(lambda: self.remarks(site), "it is remarked on")[0]
        self.assertRegex(remark, r"agreed\.yaml:\d+:\d+: ")
        log = self.log(site)
        self.assertRegex(log, r"agreed\.yaml:\d+:\d+: measurands\.protein\.unti")
        self.assertRegex(log, r"agreed\.yaml:\d+:\d+: comparisons\.protein\.every")
        self.assertEqual(site.get("/api/status")["service"]["config_sha256"], sha256)
        site.drop("line1", "a.csv", csv([("check", "2026-02-01T06:00:00Z", "protein", "wheat-low", 10.6)]))
        site.wait_taken()

        self.write(site, right.replace("alerts:", "alerts:\n  hold: 2h", 1).replace(
            "    []", "    - {name: r, url: 'http://127.0.0.1:9/', secret_file: nowhere}"))
        self.hang_up(site)
        wait_until(lambda: any("nowhere" in r for r in self.remarks(site)), "a missing secret is told too")

        self.reload(site, right.replace("remind_every: 8h", "remind_every: 9h"))
        self.assertEqual(self.remarks(site), [])

    def test_state_and_address_stay_until_the_next_start_and_that_is_said(self):
        site = self.make_site().start()
        text = site.config.read_text().replace("state: state", "state: elsewhere").replace("port: 0", "port: 1")
        self.reload(site, text)
        remark = wait_until(lambda: self.remarks(site), "it is remarked on")[0]
        self.assertIn("listen and state", remark)
        self.assertIn("listen and state", self.log(site))
        self.assertFalse((site.folder / "elsewhere").exists())

    def test_routes_and_tokens_change(self):
        first, second = self.make_receiver(), self.make_receiver()
        site = self.make_site(receiver_port=first.port).start()
        site.drop("line1", "bad.csv", "nonsense\n")
        wait_until(lambda: first.events("file_rejected"), "the first hears")
        token = "a token of this test"
        (site.folder / "tokens").write_text(f"operator anna {hashlib.sha256(token.encode()).hexdigest()}\n")
        self.reload(site, site.config.read_text().replace(f":{first.port}/", f":{second.port}/") +
                    "access: {tokens_file: tokens}\n")
        heard = len(first.got)
        alert = self.alerts(site, "open")[0]["id"]
        answer = site.request(f"/api/alerts/{alert}/acknowledge", "POST", json.dumps({"by": "anna", "note": "seen"}),
                              {"Authorization": f"Bearer {token}", "Content-Type": "application/json"})
        self.assertEqual(answer[0], 200, answer)
        wait_until(lambda: second.events(type_="agreed.alert.resolved"), "the second hears of the rest")
        self.assertEqual(len(first.got), heard)

    def test_files_dropped_while_reloads_follow_each_other_count_once(self):
        site = self.make_site().start()
        text = site.config.read_text()
        (site.folder / "drop" / "grow").mkdir()
        text = text.replace("measurands:\n  protein", "  grow: {inbox: drop/grow, mode: growing, settle: 50ms, rescan: 1s}\n"
                            "measurands:\n  protein", 1)
        self.reload(site, text)
        plant = Plant(seed=3)
        rows = {a: r for a, r in plant.checks(0, 150).items()}
        export = site.folder / "drop" / "grow" / "export.csv"
        export.write_text(csv([]))
        done = threading.Event()

        def write():
            for i in range(0, 300, 2):
                for analyzer in rows:
                    site.drop(analyzer, f"{i:04d}.csv", csv(rows[analyzer][i:i + 2]))
                with open(export, "a") as file:
                    file.write(csv(rows["line1"][i:i + 2]).split("\n", 1)[1])
                time.sleep(0.01)
            done.set()

        writer = threading.Thread(target=write)
        writer.start()
        reloads = 0
        while not done.is_set() or reloads < 5:
            reloads += 1
            text_now = text.replace("false_alerts_per_year: 6", f"false_alerts_per_year: {2 + reloads % 5}")
            sha256 = self.write(site, text_now)
            self.hang_up(site)
            time.sleep(0.03)
        writer.join()
        self.in_force(site, sha256)
        site.wait_taken()
        intake = wait_until(lambda: (lambda i: i if i["readings"]["accepted"] >= 900 else None)(site.get("/api/status")["intake"]),
                            "all is taken in")
        self.assertEqual(intake["readings"]["accepted"], 900)
        self.assertEqual(intake["readings"]["rejected"], 0)
        self.assertEqual(intake["readings"]["repeated"], 0)
        self.assertEqual(intake["files"]["done"], 300)
        self.assertEqual(intake["files"]["repeated"], 0)
        self.assertEqual(self.alerts(site), [])
        self.assertNotIn("commit failed", self.log(site))

    def test_the_newest_of_several_requests_counts_and_a_start_shows_the_same(self):
        site = self.make_site().start()
        self.month(site)
        text = site.config.read_text()
        for budget in (3, 4, 5):
            sha256 = self.write(site, text.replace("false_alerts_per_year: 6", f"false_alerts_per_year: {budget}"))
            self.hang_up(site)
        self.in_force(site, sha256)
        shown = [site.get(path) for path in ("/api/charts", "/api/comparisons", "/api/alerts")]
        self.assertEqual(site.stop()[0], 0)
        site.start()
        self.assertEqual([site.get(path) for path in ("/api/charts", "/api/comparisons", "/api/alerts")], shown)

    def test_sigterm_during_a_reload_ends_it_within_two_seconds_and_loses_nothing(self):
        site = self.make_site().start()
        self.month(site)
        text = site.config.read_text()
        shown = site.get("/api/comparisons")
        for pause in (0.0, 0.002, 0.01, 0.03, 0.1):
            self.write(site, text.replace("remind_every: 8h", f"remind_every: {int(9 + pause * 1000)}h"))
            self.hang_up(site)
            time.sleep(pause)
            code, seconds = site.stop()
            self.assertEqual(code, 0)
            self.assertLess(seconds, 2.0)
            site.start()
            self.assertEqual(site.get("/api/comparisons"), shown)


class History(ReloadTest):
    def test_a_standard_more_changes_the_limits_and_opens_nothing(self):
        receiver = self.make_receiver()
        site = self.make_site(receiver_port=receiver.port).start()
        self.month(site)
        chart = "/api/charts/line1/wheat-low/protein"
        before, alerts = site.get(chart)["change"], self.alerts(site)
        wait_until(lambda: len(receiver.got) >= len(alerts), "what holds is told")
        told = len(receiver.got)
        self.reload(site, site.config.read_text().replace("comparisons:", THIRD_STANDARD))
        after = site.get(chart)["change"]
        self.assertGreater(after["in_control_run_length"], before["in_control_run_length"])
        self.assertGreater(after["limit"], before["limit"])
        self.assertEqual(after["score"], before["score"])
        # What still holds says the new limits, and nobody is told: it is no news that somebody must act on.
        self.assertEqual([(a["id"], a["opened_at"]) for a in self.alerts(site)], [(a["id"], a["opened_at"]) for a in alerts])
        self.assertEqual(len(receiver.got), told)

    def test_a_comparison_renamed_keeps_its_pairs_and_the_record_of_the_old_name(self):
        receiver = self.make_receiver()
        site = self.make_site(receiver_port=receiver.port).start()
        self.month(site, drift=lambda hours: 0.4 if hours > 150 else 0.0, pairs=160)
        lost = wait_until(lambda: [a for a in self.alerts(site, "open") if a["kind"] == "agreement_lost"], "agreement is lost")[0]
        old_sha = site.get("/api/status")["service"]["config_sha256"]
        self.assertEqual(lost["config_sha256"], old_sha)
        pairs = site.get("/api/comparisons/protein?pairs=500")["pairs"]
        new_sha = self.reload(site, site.config.read_text().replace("  protein: {measurand: protein, x:", "  flour: {measurand: protein, x:"))
        self.assertEqual(site.get("/api/comparisons/flour?pairs=500")["pairs"], pairs)
        old = site.get(f"/api/alerts/{lost['id']}")
        self.assertEqual((old["state"], old["resolved_reason"]), ("resolved", "configuration_changed"))
        self.assertEqual(old["history"][0]["config_sha256"], old_sha)
        self.assertEqual(old["history"][-1]["config_sha256"], new_sha)
        new = [a for a in self.alerts(site, "open") if a["kind"] == "agreement_lost"]
        self.assertEqual([a["subject"] for a in new], [{"comparison": "flour"}])
        wait_until(lambda: any(e["data"]["id"] == lost["id"] for e in receiver.events(type_="agreed.alert.resolved")), "it is told")

    def test_alerts_about_what_is_no_longer_watched_end(self):
        site = self.make_site().start()
        shutil.rmtree(site.inbox("line2"))
        alert = wait_until(lambda: [a for a in self.alerts(site, "open") if a["kind"] == "inbox_unreachable"], "it is noticed")[0]
        self.reload(site, site.config.read_text().replace("  line2: {inbox: drop/line2, settle: 200ms, rescan: 1s}\n", "").replace(
            "comparisons:\n  protein: {measurand: protein, x: line1, y: line2, every: 2h}", "comparisons: {}"))
        ended = site.get(f"/api/alerts/{alert['id']}")
        self.assertEqual((ended["state"], ended["resolved_reason"]), ("resolved", "configuration_changed"))
        self.assertEqual(self.remarks(site), [])

    def test_since_when_a_configuration_is_in_force_outlives_restarts(self):
        site = self.make_site().start()
        first = site.get("/api/status")["service"]["config_since"]
        text = site.config.read_text()
        self.reload(site, text)
        site.stop()
        site.start()
        self.assertEqual(site.get("/api/status")["service"]["config_since"], first)
        self.reload(site, text.replace("remind_every: 8h", "remind_every: 9h"))
        self.assertGreater(site.get("/api/status")["service"]["config_since"], first)


class Notified(ReloadTest):
    """What systemd hears, over a socket as it makes one."""

    def listen(self, site):
        folder = pathlib.Path(tempfile.mkdtemp(prefix="agreed-notify-"))
        self.addCleanup(shutil.rmtree, folder)
        listener = socket.socket(socket.AF_UNIX, socket.SOCK_DGRAM)
        self.addCleanup(listener.close)
        listener.bind(str(folder / "notify"))
        listener.settimeout(harness.DEADLINE)
        site.environment = {"NOTIFY_SOCKET": str(folder / "notify"), "WATCHDOG_USEC": "300000"}
        return listener

    def next_state(self, listener):
        """(what is told, how many signs of life came before it)"""
        signs = 0
        while True:
            fields = listener.recv(4096).decode().split("\n")
            if fields != ["WATCHDOG=1"]:
                return fields, signs
            signs += 1

    def test_lines_have_a_priority_for_the_log_of_systemd_and_only_there(self):
        site = self.make_site()
        (site.folder / "log").touch()
        status = os.stat(site.folder / "log")
        site.environment = {"JOURNAL_STREAM": f"{status.st_dev}:{status.st_ino}"}
        site.start()
        right = site.config.read_text()
        self.write(site, "nonsense: 1\n")
        self.hang_up(site)
        wait_until(lambda: re.search(r"^<3>configuration not taken in: .*nonsense", self.log(site), re.M), "the error is told")
        self.assertRegex(self.log(site), r"(?m)^<6>agreed ")
        site.kill()
        site.config.write_text(right)
        (site.folder / "log").write_text("")
        site.environment = {"JOURNAL_STREAM": f"{status.st_dev}:{status.st_ino + 1}"}
        site.start()
        self.assertRegex(self.log(site), r"(?m)^\d{4}-\S+Z info agreed ")
        self.assertNotIn("<6>", self.log(site))

    def test_reloads_are_told_whatever_comes_of_them_and_signs_of_life_go_on(self):
        site = self.make_site()
        listener = self.listen(site)
        site.start()
        self.assertIn("READY=1", self.next_state(listener)[0])
        right = site.config.read_text()
        for text in (right.replace("every: 2h", "every: 3h"), "nonsense: 1\n", right):
            self.write(site, text)
            before = time.monotonic_ns() // 1000
            self.hang_up(site)
            told = self.next_state(listener)[0]
            self.assertIn("RELOADING=1", told)
            at = int(next(f for f in told if f.startswith("MONOTONIC_USEC=")).split("=")[1])
            self.assertTrue(before <= at <= time.monotonic_ns() // 1000)
            self.assertIn("READY=1", self.next_state(listener)[0])
        for _ in range(3):
            self.assertEqual(listener.recv(4096), b"WATCHDOG=1")
        site.process.send_signal(signal.SIGTERM)
        self.assertEqual(self.next_state(listener)[0], ["STOPPING=1"])
        self.assertEqual(site.process.wait(10), 0)
        site.process.stdout.close()
