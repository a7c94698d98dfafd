"""What becomes of drop folders that hang, vanish, are covered, replaced, closed to us or read-only. Most of it needs
root, because it mounts; without it those tests are skipped and say so."""
import hashlib
import os
import pathlib
import re
import signal
import subprocess
import sys
import unittest

from harness import SiteTest, wait_until
from plant import START, csv, rfc3339

NOBODY = 65534
HANG_LIMIT = 2.3  # SIGTERM ends the service within two seconds; the rest is for a busy machine


def check(i, value=10.6):
    return ("check", rfc3339(START + i), "protein", "wheat-low", value)


def mount(*arguments):
    return subprocess.run(["mount", *map(str, arguments)], capture_output=True, text=True, check=False)


class Folders(SiteTest):
    def mounted(self, *arguments):
        """Mounts; the last argument is where. Skips the test where that is not permitted."""
        made = mount(*arguments)
        if made.returncode != 0:
            self.skipTest(f"nothing can be mounted here (root is needed): {made.stderr.strip()}")
        self.addCleanup(subprocess.run, ["umount", "-l", arguments[-1]], check=False, capture_output=True)

    def share_on(self, mountpoint, folder):
        """The folder as a share whose server can be stopped."""
        server = subprocess.Popen([sys.executable, pathlib.Path(__file__).with_name("share.py"), mountpoint, folder],
                                  stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True)

        def end():
            server.kill()  # whatever hangs on it then fails
            server.wait()
            subprocess.run(["umount", "-l", mountpoint], check=False, capture_output=True)
            server.stdout.close()
            server.stderr.close()
        self.addCleanup(end)
        if server.stdout.readline() != "mounted\n":
            self.skipTest(f"no file system of ours can be mounted here: {server.stderr.read().strip()[-200:]}")
        return server

    def accepted(self, site):
        return site.get("/api/status")["intake"]["readings"]["accepted"]

    def inbox(self, site, analyzer=0):
        return site.get("/api/status")["analyzers"][analyzer]["inbox"]

    def told(self, site, *words):
        """Until the first inbox is told to be out of reach for a reason with all the words."""
        def says():
            inbox = self.inbox(site)
            return not inbox["reachable"] and inbox["reason"] and all(w in inbox["reason"] for w in words) and inbox
        inbox = wait_until(says, f"it is told that the inbox is out of reach: {words}")
        self.assertIsNotNone(inbox["since"])
        return inbox

    def reachable(self, site):
        wait_until(lambda: self.inbox(site)["reachable"], "the inbox is reachable again")
        self.assertIsNone(self.inbox(site)["since"])

    def stays(self, site, reachable, scans):
        """Each look at a folder renews the time of the figures."""
        seen = set()

        def looked():
            status = site.get("/api/status")
            self.assertEqual(status["analyzers"][0]["inbox"]["reachable"], reachable, status["analyzers"][0]["inbox"])
            seen.add(status["at"])
            return len(seen) > 2 * scans  # two watchers report
        wait_until(looked, f"the folder was looked at {scans} times")

    def reload(self, site, remind_every="8h"):
        """Until the configuration, with this changed in it, is in force."""
        text = re.sub(r"remind_every: \w+", f"remind_every: {remind_every}", site.config.read_text())
        before = (site.folder / "log").read_text().count("is in force")
        site.config.write_text(text)
        site.process.send_signal(signal.SIGHUP)
        wait_until(lambda: (site.folder / "log").read_text().count("is in force") > before, "the configuration is in force")
        sha256 = hashlib.sha256(text.encode()).hexdigest()
        wait_until(lambda: site.get("/api/status")["service"]["config_sha256"] == sha256, "it is shown")

    def alerts(self, site, state):
        return [a for a in site.get(f"/api/alerts?state={state}")["alerts"] if a["kind"] == "inbox_unreachable"]

    def test_a_hanging_folder_holds_up_nothing_else_and_is_told(self):
        site = self.make_site()
        backing = site.folder / "backing"
        backing.mkdir()
        (backing / "a.csv").write_text(csv([check(0)]))
        server = self.share_on(site.inbox("line1"), backing)
        site.start()
        wait_until(lambda: self.accepted(site) == 1, "the file on the share is taken in")
        server.send_signal(signal.SIGSTOP)
        self.told(site, "does not answer")
        self.assertTrue(self.inbox(site, 1)["reachable"])
        site.drop("line2", "b.csv", csv([check(1)]))
        wait_until(lambda: self.accepted(site) == 2, "the other analyzer's file is taken in")
        status, _, body = site.request("/health/ready")
        self.assertEqual(status, 200)
        self.assertIn("line1", body.decode())
        self.assertIn("does not answer", body.decode())
        alert = wait_until(lambda: self.alerts(site, "open"), "an alert is open")[0]
        self.assertEqual(alert["subject"]["analyzer"], "line1")
        (backing / "c.csv").write_text(csv([check(2)]))
        server.send_signal(signal.SIGCONT)
        self.reachable(site)
        wait_until(lambda: self.accepted(site) == 3, "what came meanwhile is taken in")
        wait_until(lambda: self.alerts(site, "resolved"), "the alert is resolved")

    def test_the_service_ends_in_time_while_a_folder_hangs(self):
        site = self.make_site()
        backing = site.folder / "backing"
        backing.mkdir()
        server = self.share_on(site.inbox("line1"), backing)
        site.start()
        server.send_signal(signal.SIGSTOP)
        self.told(site, "does not answer")
        code, seconds = site.stop()
        print(f"ended after {seconds:.2f} s")
        self.assertEqual(code, 0)
        self.assertLess(seconds, HANG_LIMIT)

    def test_it_starts_while_a_folder_hangs(self):
        site = self.make_site()
        backing = site.folder / "backing"
        backing.mkdir()
        server = self.share_on(site.inbox("line1"), backing)
        server.send_signal(signal.SIGSTOP)
        site.start(wait_ready=False)
        site.drop("line2", "b.csv", csv([check(1)]))
        wait_until(lambda: self.accepted(site) == 1, "the other analyzer's file is taken in")
        self.told(site, "does not answer")
        wait_until(lambda: site.status_code("/health/ready") == 200, "it is ready for the other")

    def test_a_broken_share_is_told(self):
        site = self.make_site()
        backing = site.folder / "backing"
        backing.mkdir()
        server = self.share_on(site.inbox("line1"), backing)
        site.start()
        server.kill()
        self.told(site, "cannot be opened")

    def test_files_on_a_read_only_share_count_once_and_stay(self):
        site = self.make_site()
        backing = site.folder / "backing"
        backing.mkdir()
        (backing / "a.csv").write_text(csv([check(0), check(1)]))
        self.share_on(site.inbox("line1"), backing)
        site.start()
        wait_until(lambda: self.accepted(site) == 2, "the file is taken in")
        site.kill()
        site.start()
        wait_until(lambda: self.inbox(site)["pending"] == 0, "it is known after a restart")
        self.assertEqual(site.get("/api/status")["intake"]["readings"],
                         {"accepted": 2, "repeated": 0, "rejected": 0, "voided": 0, "censored": 0})
        self.assertEqual(site.get("/api/status")["intake"]["files"], {"done": 1, "repeated": 0, "rejected": 0})
        self.assertEqual(os.listdir(backing), ["a.csv"])

    def test_an_inbox_that_becomes_read_only_and_writable_again(self):
        site = self.make_site()
        inbox = site.inbox("line1")
        self.mounted("-t", "tmpfs", "tmpfs", inbox)
        (inbox / "a.csv").write_text(csv([check(0)]))
        self.assertEqual(mount("-o", "remount,ro", inbox).returncode, 0)
        site.start()
        wait_until(lambda: self.accepted(site) == 1, "the file is taken in")
        self.assertTrue((inbox / "a.csv").exists())
        self.assertEqual(mount("-o", "remount,rw", inbox).returncode, 0)
        wait_until(lambda: site.files_in("line1", "done") == ["a.csv"], "it is moved once that is possible")
        self.assertEqual(site.get("/api/status")["intake"]["files"], {"done": 1, "repeated": 0, "rejected": 0})

    def test_a_share_that_is_unmounted_and_comes_back(self):
        site = self.make_site()
        real = site.folder / "real"
        real.mkdir()
        self.mounted("-t", "tmpfs", "tmpfs", real)
        self.mounted("--bind", real, site.inbox("line1"))
        site.start()
        site.drop_into(real, "a.csv", csv([check(0)]))
        wait_until(lambda: self.accepted(site) == 1, "a file is taken in")
        # Nobody must hold the folder open between two looks; a look may be under way right now.
        wait_until(lambda: subprocess.run(["umount", site.inbox("line1")], capture_output=True, check=False).returncode == 0,
                   "it can be unmounted while the service runs")
        self.told(site, "mounted")
        site.drop_into(real, "b.csv", csv([check(1)]))
        self.mounted("--bind", real, site.inbox("line1"))
        self.reachable(site)
        wait_until(lambda: self.accepted(site) == 2, "what came meanwhile is taken in")

    def test_an_empty_share_mounted_after_the_start_is_taken_at_once(self):
        site = self.make_site().start()
        inbox = site.inbox("line1")
        self.mounted("-t", "tmpfs", "tmpfs", inbox)
        self.stays(site, reachable=True, scans=4)
        site.drop_into(inbox, "a.csv", csv([check(0)]))
        wait_until(lambda: self.accepted(site) == 1, "a file on the share is taken in")
        subprocess.run(["umount", "-l", inbox], check=True)
        self.told(site, "another device")
        self.reload(site)
        self.stays(site, reachable=False, scans=3)  # what was known of the share is known after a reload
        self.mounted("-t", "tmpfs", "tmpfs", inbox)  # empty, and on a new device as a network share is each time
        self.reachable(site)
        self.stays(site, reachable=True, scans=2)
        subprocess.run(["umount", "-l", inbox], check=True)
        self.told(site, "another device")
        site.drop("line1", "b.csv", csv([check(1)]))  # it is meant, then
        wait_until(lambda: self.accepted(site) == 2, "a file in the folder below is taken in")
        self.assertEqual(site.files_in("line1", "done"), ["b.csv"])

    def test_a_share_of_the_machines_table_that_is_not_mounted_at_the_start(self):
        site = self.make_site()
        inbox = site.inbox("line1")
        table = site.folder / "fstab"
        table.write_text(f"//line1-pc/export {inbox} cifs credentials=/etc/agreed/secrets/line1,_netdev,nofail 0 0\n")
        # In a view of the files of its own, the machine's own table stays as it is.
        enter = ["unshare", "-m", "--propagation", "private", "sh", "-c", 'mount --bind "$0" /etc/fstab && exec "$@"', str(table)]
        if subprocess.run([*enter, "true"], capture_output=True, check=False).returncode != 0:
            self.skipTest("nothing can be mounted here (root is needed)")
        site.start(within=enter)
        inside = ["nsenter", "-m", "-t", str(site.process.pid)]
        self.told(site, f"nothing is mounted at {inbox}")
        wait_until(lambda: self.alerts(site, "open"), "an alert is open")
        subprocess.run([*inside, "mount", "-t", "tmpfs", "tmpfs", inbox], check=True)
        self.reachable(site)
        wait_until(lambda: self.alerts(site, "resolved"), "the alert is resolved")
        self.assertTrue(self.inbox(site, 1)["reachable"])

    def test_a_reload_while_a_folder_hangs(self):
        site = self.make_site()
        backing = site.folder / "backing"
        backing.mkdir()
        (backing / "a.csv").write_text(csv([check(0)]))
        server = self.share_on(site.inbox("line1"), backing)
        site.start()
        wait_until(lambda: self.accepted(site) == 1, "the file on the share is taken in")
        server.send_signal(signal.SIGSTOP)
        self.told(site, "does not answer")
        self.reload(site, remind_every="9h")
        self.assertIn("its watcher of before the reload ends when it does", (site.folder / "log").read_text())
        site.drop("line2", "b.csv", csv([check(1)]))
        wait_until(lambda: self.accepted(site) == 2, "the other analyzer's file is taken in")
        self.told(site, "does not answer")  # the new watcher hangs as the one before
        self.assertTrue(self.inbox(site, 1)["reachable"])
        (backing / "c.csv").write_text(csv([check(2)]))
        server.send_signal(signal.SIGCONT)
        self.reachable(site)
        wait_until(lambda: self.accepted(site) == 3, "what came meanwhile is taken in")
        wait_until(lambda: self.alerts(site, "resolved"), "the alert is resolved")
        self.reload(site, remind_every="10h")
        site.drop("line2", "d.csv", csv([check(3)]))
        wait_until(lambda: self.accepted(site) == 4, "the other goes on")
        wait_until(lambda: self.inbox(site)["pending"] == 0, "files that stay on the share are known")
        readings = site.get("/api/status")["intake"]["readings"]
        self.assertEqual((readings["accepted"], readings["repeated"]), (4, 0))
        code, seconds = site.stop()
        self.assertEqual(code, 0)
        self.assertLess(seconds, HANG_LIMIT)

    def test_the_service_ends_in_time_after_reloads_while_a_folder_hangs(self):
        site = self.make_site()
        backing = site.folder / "backing"
        backing.mkdir()
        server = self.share_on(site.inbox("line1"), backing)
        site.start()
        server.send_signal(signal.SIGSTOP)
        self.told(site, "does not answer")
        self.reload(site, remind_every="9h")
        self.reload(site, remind_every="10h")
        site.drop("line2", "b.csv", csv([check(1)]))
        wait_until(lambda: self.accepted(site) == 1, "the other analyzer's file is taken in")
        code, seconds = site.stop()
        print(f"ended after {seconds:.2f} s")
        self.assertEqual(code, 0)
        self.assertLess(seconds, HANG_LIMIT)

    def test_a_link_in_the_place_of_the_folder_is_not_followed(self):
        site = self.make_site().start()
        inbox, elsewhere = site.inbox("line1"), site.folder / "elsewhere"
        elsewhere.mkdir()
        (elsewhere / "secret.csv").write_text(csv([check(0)]))
        inbox.rename(site.folder / "away")
        inbox.symlink_to(elsewhere)
        self.told(site, "symbolic link")
        self.assertEqual(os.listdir(elsewhere), ["secret.csv"])
        self.assertEqual(self.accepted(site), 0)
        inbox.unlink()
        (site.folder / "away").rename(inbox)
        self.reachable(site)
        site.drop("line1", "a.csv", csv([check(1)]))
        wait_until(lambda: self.accepted(site) == 1, "files are taken in again")

    def test_a_folder_and_a_file_that_may_not_be_read(self):
        if os.getuid() != 0:
            self.skipTest("root is needed to run the service as somebody else")
        site = self.make_site()
        for path in [site.folder, *site.folder.rglob("*")]:
            os.chown(path, NOBODY, NOBODY)
        site.start(user=NOBODY)
        inbox = site.inbox("line1")
        (inbox / "a.csv.part").write_text(csv([check(0)]))
        os.chmod(inbox / "a.csv.part", 0)
        (inbox / "a.csv.part").rename(inbox / "a.csv")
        wait_until(lambda: "Permission denied" in (site.folder / "log").read_text(), "the file's fault is in the log")
        wait_until(lambda: self.inbox(site)["pending"] == 1, "it is told to wait")
        os.chmod(inbox / "a.csv", 0o644)
        wait_until(lambda: self.accepted(site) == 1, "the file is taken once it may be read")
        os.chmod(inbox, 0)
        self.told(site, "Permission denied")
        wait_until(lambda: self.alerts(site, "open"), "an alert is open")
        os.chmod(inbox, 0o755)
        self.reachable(site)
        wait_until(lambda: self.alerts(site, "resolved"), "the alert is resolved")

    def test_events_that_are_lost_are_made_good_by_a_scan(self):
        limit = pathlib.Path("/proc/sys/fs/inotify/max_queued_events")
        before = limit.read_text()
        try:
            limit.write_text("4")
        except OSError as error:
            self.skipTest(f"the event queue cannot be made small here (root is needed): {error}")
        try:
            site = self.make_site(rescan="1h").start()  # no scan comes to help but the one that the loss brings
        finally:
            limit.write_text(before)
        site.process.send_signal(signal.SIGSTOP)
        for i in range(300):
            site.drop("line1", f"{i}.csv", csv([check(i)]))
        site.process.send_signal(signal.SIGCONT)
        site.wait_taken("all files are found")
        self.assertEqual(self.accepted(site), 300)

    def test_names_of_any_bytes(self):
        site = self.make_site().start()
        inbox = os.fsencode(site.inbox("line1"))
        names = [b"two words.csv", b"new\nline.csv", b"not utf8 \xff\xfe.csv", "Fehlerfälle 中文.csv".encode(),
                 b"-rf *.csv", b"%s%n$(reboot).csv", b"a" * 251 + b".csv"]
        for i, name in enumerate(names):
            with open(os.path.join(inbox, b".t"), "wb") as file:
                file.write(csv([check(i), check(1000 + i, "bad")]).encode())
            os.rename(os.path.join(inbox, b".t"), os.path.join(inbox, name))
        wait_until(lambda: self.accepted(site) == len(names), "all files are taken in")
        site.wait_taken()
        done = sorted(f for _, _, files in os.walk(os.path.join(inbox, b"done")) for f in files)
        self.assertEqual(done, sorted(names))
        self.assertEqual([a["kind"] for a in site.get("/api/alerts?state=open")["alerts"]], ["file_rejected"])


if __name__ == "__main__":
    unittest.main()
