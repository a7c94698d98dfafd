"""What comes only with time: silence, and alerts that nobody acknowledged. Real minutes."""
from harness import wait_until
from plant import csv
from test_watch import WatchTest, check


class Silence(WatchTest):
    def test_silence_is_told_once_and_resolves_and_what_nobody_acknowledges_goes_further(self):
        receiver = self.make_receiver()
        self.site = site = self.make_watched(receiver)
        site.config.write_text(site.config.read_text().replace("    every: 8h", "    every: 1min")
                               .replace(" every: 2h", " every: 1min"))
        site.start()
        first = wait_until(lambda: receiver.events(type_="agreed.heartbeat"), "a sign of life at the start")[0]
        self.assertEqual(first["data"]["site"], "Harrow Mill")
        self.assertEqual(set(first["data"]["chain"]), {"sequence", "sha256"})
        site.drop("line1", "bad.csv", "nonsense\n")
        site.drop("line1", "seen.csv", csv([check("wheat-low", 10.6)]))
        wait_until(lambda: self.of("file_rejected"), "the rejected file is told")

        def silent():
            return sorted(a["subject"]["analyzer"] for a in self.of("results_silent") if a["state"] == "open")

        wait_until(lambda: silent() == ["line1", "line2"], "both analyzers fell silent", 150)
        self.assertEqual(self.of("check_overdue") + self.of("pairs_overdue"), [], "one alert for one cause")
        line1 = [a for a in self.of("results_silent") if a["subject"]["analyzer"] == "line1"][0]
        self.assertEqual(line1["severity"], "notice")
        self.assertIn("The last came at", line1["text"])
        self.assertIn("every 1 min", line1["text"])
        chief = wait_until(lambda: [g for g in receiver.got if g["path"] == "/late"], "what nobody acknowledged goes further", 90)
        self.assertEqual(chief[0]["event"]["data"]["kind"], "file_rejected")
        self.assertEqual(chief[0]["event"]["type"], "agreed.alert.opened")
        self.assertTrue(chief[0]["signed"])
        site.drop("line1", "again.csv", csv([check("wheat-low", 10.61)]))
        wait_until(lambda: silent() == ["line2"], "line1 is heard of again")
        self.assertGreaterEqual(len(receiver.events(type_="agreed.heartbeat")), 2)
        before = len([g for g in receiver.got if g["path"] == "/late"])
        site.kill()
        site.start()
        site.wait_taken()
        wait_until(lambda: silent() == ["line2"], "an open silence outlasts a restart")
        self.assertEqual(len([g for g in receiver.got if g["path"] == "/late" and
                              g["event"]["data"]["kind"] == "file_rejected"]), 1, "told once, also over a restart")
        self.assertGreaterEqual(before, 1)
