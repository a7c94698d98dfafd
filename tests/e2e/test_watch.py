"""What the clock tells: silence, overdue standards, alerts nobody acknowledged, holds, signs of life. What takes real minutes is in test_silence."""
import datetime

import harness
from harness import SiteTest, wait_until
from plant import csv


def now(minutes=0):
    at = datetime.datetime.now(datetime.timezone.utc) + datetime.timedelta(minutes=minutes)
    return at.strftime("%Y-%m-%dT%H:%M:%S.%f")[:-3] + "Z"


def check(item, value, minutes=0):
    return ("check", now(minutes), "protein", item, value)


class WatchTest(SiteTest):
    def make_watched(self, receiver):
        routes = f"    - {{name: engineer, url: 'http://127.0.0.1:{receiver.port}/now', secret_file: secret, heartbeat: 1min}}\n" \
                 f"    - {{name: chief, url: 'http://127.0.0.1:{receiver.port}/late', secret_file: secret, " \
                 f"unacknowledged_for: 1min, kinds: [file_rejected, results_silent]}}"
        return self.make_site(config=harness.CONFIG.format(port=0, rescan="1s", decimals=2, routes=routes))

    def of(self, kind):
        return [a for a in self.site.get("/api/alerts?state=open,acknowledged,resolved")["alerts"] if a["kind"] == kind]


class Watch(WatchTest):
    def test_an_intervention_holds_what_is_told_of_its_analyzer(self):
        receiver = self.make_receiver()
        self.site = site = self.make_watched(receiver).start()
        site.drop("line1", "work.csv", csv([("intervention", now(), "", "repaired", "")]))
        site.wait_taken()
        site.drop("line1", "bad.csv", "nonsense\n")
        site.drop("line2", "bad.csv", "nonsense\n")
        told = wait_until(lambda: receiver.events("file_rejected"), "line2 is told")
        self.assertEqual([e["data"]["subject"]["analyzer"] for e in told], ["line2"])
        held = wait_until(lambda: [a for a in self.of("file_rejected") if a["subject"]["analyzer"] == "line1"],
                          "line1 is recorded all the same")[0]
        self.assertEqual((held["state"], held["held"]), ("open", "opened"))

    def test_an_inbox_that_cannot_be_reached_is_told_and_resolved(self):
        receiver = self.make_receiver()
        self.site = site = self.make_watched(receiver).start()
        inbox = site.inbox("line1")
        inbox.rename(inbox.with_name("gone"))
        event = wait_until(lambda: receiver.events("inbox_unreachable"), "the missing inbox is told")[0]
        self.assertEqual(event["data"]["subject"], {"analyzer": "line1"})
        self.assertEqual(event["data"]["severity"], "warning")
        self.assertIn("drop/line1", event["data"]["text"])
        inbox.with_name("gone").rename(inbox)
        wait_until(lambda: receiver.events("inbox_unreachable", "agreed.alert.resolved"), "it is back")

    def test_little_room_for_the_journal_is_told(self):
        receiver = self.make_receiver()
        self.site = site = self.make_watched(receiver)
        site.config.write_text(site.config.read_text().replace("state: state\n", "state: state\nleast_free_mb: 900000000\n"))
        site.start()
        event = wait_until(lambda: receiver.events("storage_low"), "little room is told")[0]
        self.assertEqual((event["data"]["severity"], event["data"]["subject"]), ("critical", {"service": "storage"}))
        self.assertEqual(site.get("/api/status")["overall"], "alert")

    def test_an_endpoint_that_is_gone_is_told_elsewhere(self):
        gone, receiver = self.make_receiver(), self.make_receiver()
        gone.answer = 410
        self.site = site = self.make_watched(receiver)
        site.config.write_text(site.config.read_text().replace(f"{receiver.port}/late', secret_file: secret, unacknowledged_for: 1min, kinds: [file_rejected, results_silent]",
                                                               f"{gone.port}/late', secret_file: secret"))
        site.start()
        site.drop("line1", "bad.csv", "nonsense\n")
        event = wait_until(lambda: receiver.events("delivery_failing"), "the other route hears of it")[0]
        self.assertEqual(event["data"]["subject"], {"service": "chief"})
        self.assertIn("410", event["data"]["text"])
