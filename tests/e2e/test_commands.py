"""token, send-test, resend and status through the real executable, beside the running service."""
import hashlib
import json
import os
import pty
import sqlite3
import stat
import subprocess

from harness import AGREED, SiteTest, wait_until
from plant import Plant, csv

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
        (self.site.folder / "secret").write_text("whsec_no base64\n")
        malformed = self.agreed("check")
        self.assertEqual(malformed.returncode, 2)
        self.assertIn("route engineer: secret file", malformed.stderr)
        (self.site.folder / "secret").write_text("\n")
        secretless = self.agreed("send-test")
        self.assertEqual(secretless.returncode, 2)
        self.assertIn("secret_file", secretless.stderr)
        self.site = self.make_site()
        none = self.agreed("send-test")
        self.assertEqual(none.returncode, 2)
        self.assertIn("alerts.routes", none.stderr)
        self.assertEqual(receiver.got, [])


class Resend(Commands):
    def given_up(self):
        """A site whose one message was answered 410, the message's webhook-id, and the receiver."""
        receiver = self.make_receiver()
        receiver.answer = 410
        site = self.with_tokens(receiver_port=receiver.port).start()
        # The port was chosen at the start; the commands read it from the configuration. A running service does not.
        site.config.write_text(site.config.read_text().replace("port: 0", "port: " + site.base.rsplit(":", 1)[1]))
        site.drop("line1", "bad.csv", BAD_FILE)
        wait_until(lambda: receiver.got, "the message is tried")
        delivery = wait_until(lambda: [d for d in self.delivery() if d["state"] == "undeliverable"], "it is given up")[0]
        return receiver, delivery["message"]

    def delivery(self):
        return self.site.get("/api/alerts/1")["deliveries"]

    def test_a_message_given_up_is_sent_again_under_the_same_id(self):
        receiver, message = self.given_up()
        token = {"AGREED_TOKEN": self.make_token("operator")}
        receiver.answer = 204
        done = self.agreed("resend", message, environment=token)
        self.assertEqual(done.returncode, 0, done.stderr)
        self.assertIn("queued again for route engineer", done.stdout)
        wait_until(lambda: self.delivery()[0]["state"] == "delivered", "it is delivered")
        tries = [g for g in receiver.got if g["headers"]["webhook-id"] == message]
        self.assertEqual([g["answered"] for g in tries], [410, 204])
        self.assertEqual(tries[0]["body"], tries[1]["body"])
        self.assertTrue(tries[1]["signed"])
        self.assertEqual(self.delivery()[0]["tries"], 2)
        # What was delivered may be wanted again; and nothing of this is a fault of the journal.
        file = self.site.folder / "token"
        file.write_text(token["AGREED_TOKEN"] + "\n")
        again = self.agreed("resend", message, "--token-file", file, "--json")
        self.assertEqual((again.returncode, json.loads(again.stdout)), (0, {"message": message, "route": "engineer", "state": "waiting"}))
        wait_until(lambda: len([g for g in receiver.got if g["headers"]["webhook-id"] == message]) == 3, "it arrives once more")
        wait_until(lambda: self.delivery()[0]["state"] == "delivered", "it is marked delivered")
        self.assertEqual(self.agreed("verify").returncode, 0)
        self.assertNotIn(token["AGREED_TOKEN"], (self.site.folder / "log").read_text())

    def test_a_queued_message_survives_a_kill_and_is_not_queued_twice(self):
        receiver, message = self.given_up()
        token = {"AGREED_TOKEN": self.make_token("operator")}
        receiver.answer = 503
        self.assertEqual(self.agreed("resend", message, environment=token).returncode, 0)
        wait_until(lambda: len(receiver.got) >= 2, "it is tried again")
        waits = self.agreed("resend", message, environment=token)
        self.assertEqual((waits.returncode, waits.stdout), (1, ""))
        self.assertIn("anyway", waits.stderr)
        self.site.kill()
        self.assertEqual(self.delivery_state(), "waiting")
        receiver.answer = 204
        self.site.start()
        wait_until(lambda: receiver.events("file_rejected"), "it arrives after the restart")
        self.assertEqual(receiver.events("file_rejected")[0]["id"], message)

    def delivery_state(self):
        with sqlite3.connect(self.site.folder / "state" / "journal.sqlite") as database:
            return database.execute("SELECT state FROM outbox ORDER BY message LIMIT 1").fetchone()[0]

    def test_who_may_not_what_is_unknown_and_where_nobody_answers(self):
        _, message = self.given_up()
        operator, reader = self.make_token("operator"), self.make_token("reader")
        for token, code in (("", 2), ("agreed_wrong", 2), (reader, 2), ("two words", 2)):
            done = self.agreed("resend", message, environment={"AGREED_TOKEN": token})
            self.assertEqual((done.returncode, done.stdout), (code, ""), token)
            self.assertIn("AGREED_TOKEN", done.stderr)
        unknown = self.agreed("resend", "msg_none", "--json", environment={"AGREED_TOKEN": operator})
        self.assertEqual(unknown.returncode, 1)
        self.assertIn("no message msg_none", json.loads(unknown.stdout)["error"])
        odd = self.agreed("resend", "../../alerts/1/acknowledge", environment={"AGREED_TOKEN": operator})
        self.assertEqual(odd.returncode, 1)
        self.assertEqual(self.agreed("resend", message, "--token-file", "/no/such/file").returncode, 2)
        status, headers, body = self.site.request("/api/messages/msg_none/resend", "POST", "", {"Authorization": f"Bearer {operator}"})
        self.assertEqual((status, headers["Content-Type"], json.loads(body)["status"]), (404, "application/problem+json", 404))
        self.assertEqual(self.delivery()[0]["state"], "undeliverable")
        self.site.stop()
        self.assertEqual(self.agreed("resend", message, environment={"AGREED_TOKEN": operator}).returncode, 3)


class Status(Commands):
    def show(self, *arguments, environment=None):
        return subprocess.run([AGREED, "status", *map(str, arguments)], capture_output=True, text=True, timeout=60, check=False,
                              env={**os.environ, **(environment or {})})

    def test_what_agrees_and_what_does_not_and_nobody_there(self):
        self.site = site = self.make_site(decimals=3).start()
        plant = Plant(seed=14)
        checks, splits = plant.checks(0, 60), plant.splits(0, 240)
        for analyzer in checks:
            site.drop(analyzer, "history.csv", csv(sorted(checks[analyzer] + splits[analyzer], key=lambda r: r[1])))
        site.wait_taken()
        wait_until(lambda: site.get("/api/status")["overall"] == "ok", "all agrees")
        done = self.show(site.base)
        self.assertEqual(done.returncode, 0, done.stdout + done.stderr)
        for words in ("Harrow Mill: everything agrees", "agreement shown", "largest bias", "0 open", "line1", "line2", "last reading",
                      "2 taken"):
            self.assertIn(words, done.stdout)
        self.assertNotIn("\x1b", done.stdout)
        self.assertLessEqual(max(map(len, done.stdout.splitlines())), 80)
        site.config.write_text(site.config.read_text().replace("port: 0", "port: " + site.base.rsplit(":", 1)[1]))
        site.drop("line1", "bad.csv", BAD_FILE)
        site.wait_taken()
        done = self.show(site.config)
        self.assertEqual(done.returncode, 1, done.stdout + done.stderr)
        self.assertIn("ATTENTION", done.stdout)
        self.assertIn(site.get("/api/alerts")["alerts"][0]["title"].split()[0], done.stdout)
        asked = self.show(site.base + "/", "--json")
        self.assertEqual((asked.returncode, json.loads(asked.stdout)["overall"]), (1, "attention"))
        site.stop()
        for target in (site.config, site.base):
            gone = self.show(target)
            self.assertEqual((gone.returncode, gone.stdout), (3, ""))
            self.assertIn("cannot be reached", gone.stderr)

    def on_terminal(self, environment):
        """What is printed on a terminal (a pseudo-terminal of 80 columns)."""
        ours, theirs = pty.openpty()
        try:
            inherited = {name: value for name, value in os.environ.items() if name != "NO_COLOR"}
            subprocess.run([AGREED, "status", self.site.base], stdout=theirs, timeout=60, check=False,
                           env={**inherited, "TERM": "xterm", **environment})
            return os.read(ours, 65536).decode()
        finally:
            os.close(ours)
            os.close(theirs)

    def test_colour_is_for_terminals_and_only_if_wanted(self):
        self.site = self.make_site().start()
        coloured = self.on_terminal({})
        self.assertIn("\x1b[", coloured)
        for environment in ({"NO_COLOR": "1"}, {"TERM": "dumb"}):
            plain = self.on_terminal(environment)
            self.assertNotIn("\x1b", plain)
            self.assertIn("ATTENTION", plain)

    def test_a_token_is_asked_for_where_others_can_reach_it(self):
        self.site = site = self.make_site()
        text = site.config.read_text().replace("address: 127.0.0.1", "address: 0.0.0.0")
        site.config.write_text(text + "access: {tokens_file: tokens}\n")
        reader = self.make_token("reader")
        # Without a token not even the harness may look whether it is ready.
        site.start()
        site.base = site.base.replace("0.0.0.0", "127.0.0.1")
        refused = self.show(site.base)
        self.assertEqual((refused.returncode, refused.stdout), (2, ""))
        self.assertIn("--token-file", refused.stderr)
        self.assertIn(self.show(site.base, environment={"AGREED_TOKEN": reader}).returncode, (0, 1))
