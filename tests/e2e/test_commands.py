"""token, send-test, resend and status through the real executable, beside the running service."""
import hashlib
import json
import os
import pathlib
import stat
import subprocess

from harness import AGREED, SiteTest, wait_until

BAD_FILE = "nonsense\n"


class Commands(SiteTest):
    def agreed(self, command, *arguments, environment=None):
        """The command with this site's configuration first."""
        return subprocess.run([AGREED, command, str(self.site.config), *map(str, arguments)], capture_output=True, text=True,
                              timeout=60, check=False, env={**os.environ, **(environment or {})})

    def make_token(self, role):
        done = self.agreed("token", "--role", role, "--json")
        self.assertEqual(done.returncode, 0, done.stderr)
        return json.loads(done.stdout)["token"]

    def with_tokens(self, **options):
        """A site whose configuration names a tokens file."""
        self.site = self.make_site(**options)
        self.site.config.write_text(self.site.config.read_text() + "access: {tokens_file: tokens}\n")
        return self.site


class Token(Commands):
    def test_a_token_made_while_the_service_runs_acknowledges_at_once(self):
        site = self.with_tokens().start()
        site.drop("line1", "bad.csv", BAD_FILE)
        site.wait_taken()
        body = '{"by": "K. Byrne", "note": "sent again"}'

        def acknowledge(token):
            return site.request("/api/alerts/1/acknowledge", "POST", body, {"Authorization": f"Bearer {token}"})[0]
        self.assertEqual(acknowledge("agreed_" + 48 * "0"), 401)
        reader = self.make_token("reader")
        self.assertEqual(acknowledge(reader), 403)
        operator = self.make_token("operator")
        self.assertEqual(acknowledge(operator), 200)
        tokens = site.folder / "tokens"
        self.assertEqual(stat.S_IMODE(tokens.stat().st_mode), 0o600)
        self.assertEqual([line.split() for line in tokens.read_text().splitlines()],
                         [[role, role, hashlib.sha256(token.encode()).hexdigest()] for role, token in (("reader", reader), ("operator", operator))])
        self.assertNotIn(operator, (site.folder / "log").read_text())

    def test_what_people_read_and_what_cannot_be(self):
        site = self.with_tokens()
        done = self.agreed("token", "--role", "operator", "--name", "shift-leader")
        self.assertEqual(done.returncode, 0, done.stderr)
        token = done.stdout.split()[1]
        self.assertIn("shown this once", done.stdout)
        line = f"operator shift-leader {hashlib.sha256(token.encode()).hexdigest()}\n"
        self.assertEqual((site.folder / "tokens").read_text(), line)
        taken = self.agreed("token", "--role", "reader", "--name", "shift-leader")
        self.assertEqual((taken.returncode, taken.stdout), (2, ""))
        self.assertIn("there is a token named shift-leader already", taken.stderr)
        self.assertEqual((site.folder / "tokens").read_text(), line)
        nowhere = self.make_site()
        self.site = nowhere
        none = self.agreed("token", "--role", "reader")
        self.assertEqual((none.returncode, none.stdout), (2, ""))
        self.assertIn("access.tokens_file", none.stderr)
        nowhere.config.write_text(nowhere.config.read_text() + "access: {tokens_file: no/such/folder/tokens}\n")
        lost = self.agreed("token", "--role", "reader")
        self.assertEqual((lost.returncode, lost.stdout), (3, ""))
        self.assertIn("no/such/folder/tokens", lost.stderr)
