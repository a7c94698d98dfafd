"""Files that the configuration names and the service's user may not read: told with user and folder at the check, at
the start and at a reload, not as missing. As root the service runs as nobody; else permissions hold back whoever runs this."""
import hashlib
import json
import os
import signal
import subprocess

from harness import AGREED, SiteTest, wait_until

NOBODY = 65534
TOKEN = "agreed_a_token_of_this_test"
LINE = f"operator shift {hashlib.sha256(TOKEN.encode()).hexdigest()}\n"


class Permissions(SiteTest):
    def make_kept_site(self):
        """A site whose secret and tokens lie in a folder of their own, all of it its user's."""
        site = self.make_site(receiver_port=9)
        self.kept = site.folder / "kept"
        self.kept.mkdir()
        (site.folder / "secret").rename(self.kept / "secret")
        (self.kept / "tokens").write_text(LINE)
        site.config.write_text(site.config.read_text().replace("secret_file: secret", "secret_file: kept/secret") +
                               "access: {tokens_file: kept/tokens}\n")
        self.user = None
        if os.getuid() == 0:
            self.user = NOBODY
            for path in [site.folder, *site.folder.rglob("*")]:
                os.chown(path, NOBODY, NOBODY)
        self.addCleanup(os.chmod, self.kept, 0o700)
        return site

    def agreed(self, site, command, *arguments):
        return subprocess.run([AGREED, command, site.config, *arguments], capture_output=True, text=True, timeout=60, check=False,
                              user=self.user)

    def denied(self, text, what):
        self.assertRegex(text, rf"permission denied: user \S+ may not {what}")
        self.assertNotIn("there is no file", text)

    def remarks(self, site):
        status, _, body = site.request("/health/ready")
        self.assertEqual(status, 200, body)
        return json.loads(body)["remarks"]

    def log(self, site):
        return (site.folder / "log").read_text()

    def hang_up(self, site):
        site.process.send_signal(signal.SIGHUP)

    def may_acknowledge(self, site):
        """Whether the token is known: there is no such alert, but that is told only to who may ask."""
        return site.request("/api/alerts/1/acknowledge", "POST", '{"by": "K. Byrne", "note": "x"}',
                            {"Authorization": f"Bearer {TOKEN}"})[0] != 401

    def test_a_secret_in_a_folder_that_may_not_be_searched(self):
        site = self.make_kept_site()
        os.chmod(self.kept, 0)
        search = f"search the folder {self.kept}"
        for command in ("check", "run"):
            done = self.agreed(site, command)
            self.assertEqual(done.returncode, 2, done.stderr)
            self.assertRegex(done.stderr, r"agreed\.yaml:\d+:\d+: alerts\.routes\[0\]\.secret_file: ")
            self.denied(done.stderr, search)
        os.chmod(self.kept, 0o700)
        site.start(user=self.user)
        os.chmod(self.kept, 0)
        self.hang_up(site)
        remark = wait_until(lambda: [r for r in self.remarks(site) if "secret_file" in r], "the reload is refused with a remark")[0]
        self.denied(remark, search)
        self.assertRegex(self.log(site), rf"configuration not taken in: .*secret_file: permission denied: user \S+ may not {search}")
        os.chmod(self.kept, 0o700)
        self.hang_up(site)
        wait_until(lambda: self.remarks(site) == [], "it is taken in once the file can be read")

    def test_a_tokens_file_that_may_not_be_read(self):
        site = self.make_kept_site()
        tokens = self.kept / "tokens"
        os.chmod(tokens, 0)
        done = self.agreed(site, "check")
        self.assertEqual(done.returncode, 0, done.stderr)
        self.assertIn("warning: access.tokens_file: ", done.stderr)
        self.denied(done.stderr, f"read {tokens}")
        site.start(user=self.user)
        told = lambda: self.log(site).count(f" may not read {tokens}")
        self.assertEqual(told(), 1, "told at the start, before anybody shows a token")
        self.denied(self.remarks(site)[0], f"read {tokens}")
        self.assertFalse(self.may_acknowledge(site))
        self.assertEqual(told(), 1, "told once")
        self.hang_up(site)
        wait_until(lambda: told() == 2, "told again by a reload")
        self.assertIn("warning", next(line for line in self.log(site).splitlines() if f"may not read {tokens}" in line))
        os.chmod(tokens, 0o600)
        wait_until(lambda: self.remarks(site) == [], "no remark once it can be read")
        self.assertIn("can be read again", self.log(site))
        self.assertTrue(self.may_acknowledge(site))

    def test_a_line_of_the_tokens_file_that_is_none(self):
        site = self.make_kept_site()
        tokens = self.kept / "tokens"
        tokens.write_text(LINE + "operator " + TOKEN + "\n")
        done = self.agreed(site, "check")
        self.assertEqual(done.returncode, 0, done.stderr)
        self.assertIn(f"{tokens}:2: expected", done.stderr)
        site.start(user=self.user)
        self.assertEqual(self.log(site).count(f"{tokens}:2: expected"), 1)
        self.assertIn(f"{tokens}:2: expected", self.remarks(site)[0])
        self.assertTrue(self.may_acknowledge(site), "the other lines count")
        tokens.write_text(LINE)
        wait_until(lambda: self.remarks(site) == [], "no remark once each line can be used")
        self.assertIn("can be used again", self.log(site))
        for text in (done.stderr, self.log(site)):
            self.assertNotIn(TOKEN, text)
