"""kill -9 again and again while files arrive: nothing lost, nothing doubled, every alert told once under one id.

AGREED_KILLS and AGREED_SEED make the campaign longer and another one; AGREED_KILL_SECONDS bounds each part of it."""
import os
import random
import threading
import time
import unittest

import campaign
from harness import SiteTest, wait_until
from outcome import all_delivered, check_deliveries, check_same, derived, moved_files, outcome

KILLS = int(os.environ.get("AGREED_KILLS", "160"))
SECONDS = float(os.environ.get("AGREED_KILL_SECONDS", "40" if "AGREED_KILLS" not in os.environ else "1e9"))
SEED = int(os.environ.get("AGREED_SEED", "20260105"))


class Crash(SiteTest):
    def setUp(self):
        self.chance = random.Random(SEED)
        self.killed = 0
        self.until = 0.0

    def make_run(self):
        receiver = self.make_receiver()
        return self.make_site(receiver_port=receiver.port, decimals=3).start(), receiver

    def kill(self, site):
        site.kill()
        self.killed += 1
        site.start(wait_ready=self.chance.random() < 0.5)

    def may_kill(self, most):
        return self.killed < most and time.monotonic() < self.until

    def finish(self, site):
        wait_until(lambda: site.status_code("/health/ready") == 200, "it is ready")
        site.wait_taken(seconds=120)
        wait_until(lambda: all_delivered(site), "every message is delivered")

    def same_files(self, site, calm):
        self.assertEqual(moved_files(site), moved_files(calm), "each file lies once where it lay in the undisturbed run")

    # -- one file after the other: the kills fall into the life of a file, and every alert has to come out the same

    def one_by_one(self, kills):
        site, receiver = self.make_run()
        files = list(campaign.files())
        self.until = time.monotonic() + SECONDS
        for i, (analyzer, name, text) in enumerate(files):
            site.drop(analyzer, name, text)
            # The kills that are left, over the files that are left.
            while self.may_kill(kills) and self.chance.random() < (kills - self.killed) / (len(files) - i + kills - self.killed):
                time.sleep(self.chance.choice([0.0, self.chance.uniform(0.0, 0.03), self.chance.uniform(0.0, 0.4)]))
                self.kill(site)
            wait_until(lambda: not (site.inbox(analyzer) / name).exists(), f"{name} is moved")
        self.finish(site)
        return site, receiver

    def test_kills_while_one_file_after_the_other_arrives(self):
        calm, _ = self.one_by_one(kills=0)
        site, receiver = self.one_by_one(kills=KILLS * 3 // 4)
        print(f"seed {SEED}, {self.killed} kills")
        expected, found = outcome(calm), outcome(site)
        check_same(self, expected, found)
        self.assertIn("agreement_lost", {a["kind"] for a in found["alerts"]}, "the drift was found")
        self.same_files(site, calm)
        check_deliveries(self, site, receiver)

    # -- everything at once: the kills fall into batches of many files of both analyzers

    def all_at_once(self, kills):
        site, receiver = self.make_run()
        feed = threading.Thread(target=self.feed, args=(site, 0.04 if kills else 0.0))
        feed.start()
        self.until = time.monotonic() + SECONDS
        while self.may_kill(kills):
            time.sleep(self.chance.choice([self.chance.uniform(0.0, 0.1), self.chance.uniform(0.0, 0.8)]))
            self.kill(site)
        feed.join()
        self.finish(site)
        return site, receiver

    @staticmethod
    def feed(site, pause):
        for analyzer, name, text in campaign.files():
            site.drop(analyzer, name, text)
            time.sleep(pause)

    def test_kills_while_everything_arrives_at_once(self):
        calm, _ = self.all_at_once(kills=0)
        site, receiver = self.all_at_once(kills=KILLS // 4)
        print(f"seed {SEED}, {self.killed} kills")
        expected, found = derived(calm), derived(site)
        check_same(self, expected, found)
        self.assertEqual(self.conditions(site), self.conditions(calm), "what holds in the end")
        self.same_files(site, calm)
        check_deliveries(self, site, receiver)

    @staticmethod
    def conditions(site):
        """Which alerts are open in the end; how they came to be depends on the order of arrival."""
        alerts = site.get("/api/alerts?state=open,acknowledged&limit=500")["alerts"]
        return sorted((a["kind"], str(a["subject"]), a["severity"]) for a in alerts)


if __name__ == "__main__":
    unittest.main()
