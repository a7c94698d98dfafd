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


class SendTest(Commands):
    def test_a_test_message_arrives_signed_whether_or_not_the_service_runs(self):
        receiver = self.make_receiver()
        self.site = self.make_site(receiver_port=receiver.port)
        done = self.agreed("send-test")
        self.assertEqual(done.returncode, 0, done.stderr)
        self.assertRegex(done.stdout, r"^engineer: delivered, answered 204 after \d+ ms \(msg_[0-9a-f]{32}\)\n$")
        self.assertEqual(receiver.got[0]["event"]["source"], "urn:uuid:00000000-0000-0000-0000-000000000000")
        self.site.start()
        done = self.agreed("send-test", "engineer", "--json")
        self.assertEqual(done.returncode, 0, done.stderr)
        said = json.loads(done.stdout)
        got = receiver.got[1]
        self.assertTrue(all(g["signed"] for g in receiver.got))
        self.assertEqual(said["routes"], [{"route": "engineer", "delivered": True, "message": got["headers"]["webhook-id"], "status": 204,
                                           "took_ms": said["routes"][0]["took_ms"], "error": None}])
        self.assertEqual((got["event"]["type"], got["event"]["id"], got["event"]["data"]["site"]),
                         ("agreed.test", got["headers"]["webhook-id"], "Harrow Mill"))
        self.site.drop("line1", "bad.csv", BAD_FILE)
        alert = wait_until(lambda: receiver.events("file_rejected"), "an alert arrives")[0]
        self.assertEqual(got["event"]["source"], alert["source"], "a test has the source that alerts have")

    def test_what_does_not_arrive_is_told_with_its_reason(self):
        receiver = self.make_receiver()
        self.site = self.make_site(receiver_port=receiver.port)
        for status, words in ((500, "the endpoint answered 500"), (302, "redirects are not followed"), (410, "(gone)")):
            receiver.answer = status
            done = self.agreed("send-test", "engineer")
            self.assertEqual(done.returncode, 1)
            self.assertIn("engineer: NOT delivered", done.stdout)
            self.assertIn(words, done.stdout)
        self.assertEqual(len(receiver.got), 3, "each is sent once")
        receiver.close()
        done = self.agreed("send-test", "--json")
        self.assertEqual(done.returncode, 1)
        result = json.loads(done.stdout)["routes"][0]
        self.assertEqual((result["status"], result["error"]), (None, "no connection could be made"))

    def test_wrong_use(self):
        receiver = self.make_receiver()
        self.site = self.make_site(receiver_port=receiver.port)
        unknown = self.agreed("send-test", "enginer")
        self.assertEqual((unknown.returncode, unknown.stdout), (2, ""))
        self.assertIn("did you mean engineer?", unknown.stderr)
        (self.site.folder / "secret").write_text("\n")
        secretless = self.agreed("send-test")
        self.assertEqual(secretless.returncode, 2)
        self.assertIn("secret_file", secretless.stderr)
        self.site = self.make_site()
        none = self.agreed("send-test")
        self.assertEqual(none.returncode, 2)
        self.assertIn("alerts.routes", none.stderr)
        self.assertEqual(receiver.got, [])
