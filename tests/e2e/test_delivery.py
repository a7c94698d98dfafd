"""Messages arrive whatever the receiver does: hangs, resets, trickles, answers nonsense, is down for days, or is killed with us."""
import email.utils
import hashlib
import os
import pathlib
import signal
import socket
import ssl
import subprocess
import tempfile
import threading
import time

import harness
from faults import set_clock_ahead
from harness import SECRET, SiteTest, wait_until
from plant import START, csv, rfc3339
from scripted import Scripted, answer, endless, hang, raw, reset, trickle
from signed import key_of, signature, verifies

TAKE = answer(204)
WHOLE_CALL = 10.0  # seconds a call may take, by the design


def route(name, url, more="secret_file: secret"):
    return f"    - {{name: {name}, url: '{url}', {more}}}\n"


def tell_four_times(site):
    """Four alerts, one after the other: each drop is taken in before the next comes."""
    good, other = [csv([("check", rfc3339(START), "protein", "wheat-low", value)]) for value in (10.6, 10.7)]
    for analyzer in ("line1", "line2"):
        site.drop(analyzer, "bad.csv", "nonsense\n")
        site.wait_taken()
        site.drop(analyzer, "good.csv", good)
        site.wait_taken()
        site.drop(analyzer, "other.csv", other)
        site.wait_taken()


def told(requests):
    return [(r.event["type"], r.event["data"]["kind"], r.event["data"]["id"]) for r in requests]


def free_port():
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        return probe.getsockname()[1]


class Delivery(SiteTest):
    def make_scripted(self, scripts, **options):
        receiver = Scripted(scripts, **options)
        self.addCleanup(receiver.close)
        return receiver

    def make_routed(self, routes):
        return self.make_site(config=harness.CONFIG.format(port=0, rescan="1s", decimals=2, routes=routes))

    def deliveries(self, site, alert=1):
        """The alert's first delivery of each route."""
        return {d["route"]: d for d in reversed(site.get(f"/api/alerts/{alert}")["deliveries"])}

    def check_every_try(self, requests, ahead=0):
        """All tries of a message are one message: id, body; each is signed for its own time, by a clock so far `ahead`."""
        bodies = {}
        for request in requests:
            self.assertTrue(verifies(SECRET, request.headers, request.body, now=request.wall + ahead, tolerance=5))
            self.assertEqual(request.headers["webhook-id"], request.event["id"])
            self.assertEqual(bodies.setdefault(request.event["id"], request.body), request.body)


class Misbehaving(Delivery):
    def test_each_way_of_failing_delays_only_its_own_route_and_all_arrives_in_order_once(self):
        asked = float(int(time.time()) + 6)
        scripts = {
            "/plain": [TAKE],
            "/hang": [hang, TAKE],
            "/trickle": [trickle, TAKE],
            "/reset": [reset, reset, TAKE],
            "/silent-end": [raw(b""), TAKE],
            "/half-head": [raw(b"HTTP/1.1 200 OK\r\nContent-Le"), TAKE],
            "/nonsense": [raw(b"\x00\xff nonsense \r\n\r\n" * 50), raw(b"HTTP/9.9 xyz\r\n\r\n"), TAKE],
            "/fault": [answer(500, body=b"inner words of the receiver"), answer(503), TAKE],
            "/seconds": [answer(429, "Retry-After: 3"), TAKE],
            "/date": [answer(429, "Retry-After: " + email.utils.formatdate(asked, usegmt=True)), TAKE],
            "/moved": [answer(302, "Location: /target"), answer(307, "Location: /target"), TAKE],
            "/endless-fault": [endless(500), TAKE],
            "/endless-success": [endless(200)],
        }
        always = {"/never": ([hang], "no answer came within 10 s"),
                  "/breaks": ([reset], "the connection broke"),
                  "/elsewhere": ([answer(301, "Location: /target")], "redirects are not followed"),
                  "/broken": ([answer(500, body=b"inner words of the receiver")], "the endpoint answered 500")}
        receiver = self.make_scripted({**scripts, **{path: script for path, (script, _) in always.items()}, "/target": [TAKE]})
        base = f"http://127.0.0.1:{receiver.port}"
        site = self.make_routed("".join(route(path[1:], base + path) for path in [*scripts, *always])).start()
        begun = time.monotonic()
        tell_four_times(site)
        wait_until(lambda: len(receiver.taken_on("/plain")) == 4, "the route without trouble has all four")
        self.assertIsNone(receiver.on("/hang")[0].left_after, "while the hanging one still hangs")
        self.assertLess(time.monotonic() - begun, WHOLE_CALL)
        expected = told(receiver.taken_on("/plain"))
        self.assertEqual([(kind, alert) for _, kind, alert in expected],
                         [("file_rejected", "1"), ("readings_conflict", "2"), ("file_rejected", "3"), ("readings_conflict", "4")])
        for path, script in scripts.items():
            wait_until(lambda: len(receiver.taken_on(path)) >= 4, f"{path} has all four")
            self.assertEqual(told(receiver.taken_on(path)), expected, path)
            ids = [r.event["id"] for r in receiver.taken_on(path)]
            self.assertEqual(len(set(ids)), 4, path)
            self.assertEqual([r.event["id"] for r in receiver.on(path)], [ids[0]] * len(script) + ids[1:], path)
            self.check_every_try(receiver.on(path))
        for path in ("/hang", "/trickle"):
            left = receiver.on(path)[0].left_after
            self.assertGreater(left, WHOLE_CALL - 1, path)
            self.assertLess(left, WHOLE_CALL + 5, path)
        self.assertGreaterEqual(receiver.on("/seconds")[1].at - receiver.on("/seconds")[0].at, 2.9)
        self.assertGreaterEqual(receiver.on("/date")[1].wall, asked - 0.1)
        self.assertEqual(receiver.on("/target"), [], "where a redirect points gets no request")
        for path in ("/endless-fault", "/endless-success"):
            self.assertLess(receiver.on(path)[0].offered, 16 << 20, f"{path}: an answer is not read for ever")
        wait_until(lambda: all(d["state"] == "delivered" for n in range(1, 5) for d in self.deliveries(site, n).values()
                               if "/" + d["route"] in scripts), "every message that was taken is marked so")
        for path, (_, words) in always.items():
            waiting = self.deliveries(site)[path[1:]]
            self.assertEqual(waiting["state"], "waiting")
            self.assertIn(words, waiting["last_error"])
            self.assertEqual({r.event["id"] for r in receiver.on(path)}, {waiting["message"]}, "the next one waits for the first")
        self.assertNotIn(b"inner words", site.request("/api/alerts/1")[2] + site.request("/alerts")[2])
        self.assertEqual(site.stop()[0], 0)

    def test_gone_ends_the_endpoint_and_the_other_route_is_told(self):
        receiver = self.make_scripted({"/gone": [answer(410)], "/plain": [TAKE]})
        base = f"http://127.0.0.1:{receiver.port}"
        site = self.make_routed(route("left", base + "/gone") + route("engineer", base + "/plain")).start()
        tell_four_times(site)
        wait_until(lambda: "delivery_failing" in [kind for _, kind, _ in told(receiver.taken_on("/plain"))], "the other route hears of it")
        failing = next(r.event["data"] for r in receiver.taken_on("/plain") if r.event["data"]["kind"] == "delivery_failing")
        self.assertEqual((failing["subject"], failing["severity"]), ({"service": "left"}, "critical"))
        self.assertIn("410", failing["text"])
        self.assertIn("left", failing["title"])
        wait_until(lambda: len(receiver.taken_on("/plain")) == 5, "the other route has all")
        self.assertEqual(len(receiver.on("/gone")), 1, "one answer is enough")
        self.assertEqual([self.deliveries(site, n)["left"]["state"] for n in range(1, 5)], ["undeliverable"] + 3 * ["waiting"])


class Outage(Delivery):
    def test_a_receiver_down_over_restarts_and_kills_gets_everything_in_order_once_under_the_same_ids(self):
        port = free_port()
        site = self.make_routed(route("engineer", f"http://127.0.0.1:{port}/hook")).start()
        site.drop("line1", "bad.csv", "nonsense\n")
        site.wait_taken()
        site.kill()
        site.start()
        site.drop("line2", "bad.csv", "nonsense\n")
        site.wait_taken()
        site.stop()
        receiver = self.make_scripted({"/hook": [answer(503)]}, port=port)
        site.start()
        wait_until(lambda: receiver.got, "it is tried while the receiver is half up")
        site.kill()
        site.start()
        site.drop("line1", "good.csv", csv([("check", rfc3339(START), "protein", "wheat-low", 10.6)]))
        site.drop("line1", "other.csv", csv([("check", rfc3339(START), "protein", "wheat-low", 10.7)]))
        site.wait_taken()
        with receiver.lock:
            receiver.scripts["/hook"] = [TAKE]
        wait_until(lambda: len(receiver.taken) >= 3, "all arrive")
        wait_until(lambda: all(self.deliveries(site, n)["engineer"]["state"] == "delivered" for n in (1, 2, 3)), "all are marked")
        self.assertEqual([(kind, alert) for _, kind, alert in told(receiver.taken)],
                         [("file_rejected", "1"), ("file_rejected", "2"), ("readings_conflict", "3")])
        self.assertEqual(len({r.event["id"] for r in receiver.got}), 3, "each under one id over all tries and starts")
        self.check_every_try(receiver.got)

    def test_killed_after_the_receiver_took_it_and_before_that_is_recorded_it_comes_again_under_the_same_id(self):
        started = threading.Event()

        def dies(connection, request):
            started.wait(8)
            os.kill(site.process.pid, signal.SIGKILL)
            site.process.wait()

        def takes_and_kills(connection, request):
            started.wait(8)
            TAKE(connection, request)
            dies(connection, request)
        receiver = self.make_scripted({"/hook": [dies, takes_and_kills, TAKE]})
        site = self.make_routed(route("engineer", f"http://127.0.0.1:{receiver.port}/hook")).start()
        started.set()
        site.drop("line1", "bad.csv", "nonsense\n")
        for _ in range(2):
            wait_until(lambda: site.process.poll() is not None, "it is killed during the call")
            site.process.stdout.close()
            started.clear()
            site.start()
            started.set()
        wait_until(lambda: self.deliveries(site)["engineer"]["state"] == "delivered", "it is marked delivered at last")
        self.assertGreaterEqual(len(receiver.got), 2)
        self.assertEqual(len({(r.event["id"], r.body) for r in receiver.got}), 1, "the same message")
        self.check_every_try(receiver.got)

    def test_after_an_hour_the_other_route_is_told_after_three_days_it_is_undeliverable_and_can_be_sent_again(self):
        port = free_port()
        plain = self.make_scripted({"/hook": [TAKE]})
        site = self.make_routed(route("night", f"http://127.0.0.1:{port}/hook") +
                                route("engineer", f"http://127.0.0.1:{plain.port}/hook"))
        (site.folder / "tokens").write_text(f"operator shift {hashlib.sha256(b'open-sesame').hexdigest()}\n")
        site.config.write_text(site.config.read_text() + "access: {tokens_file: tokens}\n")
        site.start()
        site.drop("line1", "bad.csv", "nonsense\n")
        site.wait_taken()
        wait_until(lambda: self.deliveries(site)["night"]["tries"] >= 1, "it is tried")
        self.assertIn("no connection could be made", self.deliveries(site)["night"]["last_error"])
        self.assertNotIn("delivery_failing", [kind for _, kind, _ in told(plain.taken)])
        site.stop()
        set_clock_ahead(site, 61 * 60)
        site.start()
        wait_until(lambda: any(kind == "delivery_failing" for _, kind, _ in told(plain.taken)), "the other route hears of it")
        failing = next(r.event["data"] for r in plain.taken if r.event["data"]["kind"] == "delivery_failing")
        self.assertEqual((failing["subject"], failing["severity"]), ({"service": "night"}, "critical"))
        self.assertIn("night", failing["title"])
        days = 73 * 3600
        set_clock_ahead(site, days)
        given_up = {"tries": 0, "state": "waiting"}
        while given_up["state"] == "waiting":
            site.stop()
            site.start()
            given_up = wait_until(lambda: next((d for d in [self.deliveries(site)["night"]] if d["tries"] > given_up["tries"]), None),
                                  "it is tried at once at each start")
        self.assertEqual((given_up["state"], given_up["next_try_at"]), ("undeliverable", None))
        self.assertGreaterEqual(given_up["tries"], 10)
        late = self.make_scripted({"/hook": [TAKE]}, port=port)
        site.stop()
        site.start()
        wait_until(lambda: late.taken, "what still waited arrives")
        self.assertNotIn(given_up["message"], [r.event["id"] for r in late.taken])
        status, _, _ = site.request(f"/api/messages/{given_up['message']}/resend", "POST", "", {"Authorization": "Bearer open-sesame"})
        self.assertEqual(status, 202)
        again = wait_until(lambda: [r for r in late.taken if r.event["id"] == given_up["message"]], "it is sent again")[0]
        self.assertEqual(again.event["data"]["kind"], "file_rejected")
        self.check_every_try(late.got, ahead=days)
        wait_until(lambda: ("agreed.alert.resolved", "delivery_failing", failing["id"]) in told(plain.taken), "the trouble is over")


class Secrets(Delivery):
    def test_the_verifier_gives_the_published_answer(self):
        # The known answer that the documentation and the reference libraries of Standard Webhooks publish.
        headers = {"webhook-id": "msg_p5jXN8AQM9LWM0D4loKWxJek", "webhook-timestamp": "1614265330",
                   "webhook-signature": "v1,g0hM9SsE+OTPJTGt/tmIKtSyZlE3uFJELVlNIOLJ1OE="}
        body, secret = b'{"test": 2432232314}', "whsec_MfKQ9r8GKYqrTwjUPD8ILPZIo2LaLaSw"
        self.assertEqual(signature(key_of(secret), headers["webhook-id"], headers["webhook-timestamp"], body), headers["webhook-signature"])
        self.assertTrue(verifies(secret, headers, body, now=1614265400))
        self.assertFalse(verifies(secret, headers, body, now=1614266000), "too old")
        self.assertFalse(verifies(secret, headers, body + b" "))
        self.assertFalse(verifies(SECRET, headers, body))

    def test_in_a_rotation_either_secret_verifies_from_a_file_and_from_the_environment(self):
        receiver = self.make_scripted({"/file": [TAKE], "/env": [TAKE], "/bytes": [TAKE], "/open": [TAKE]})
        base = f"http://127.0.0.1:{receiver.port}"
        site = self.make_routed(route("file", base + "/file", "secret_file: two") + route("env", base + "/env", "secret_env: HARROW_HOOK") +
                                route("bytes", base + "/bytes", "secret_file: plain") + route("open", base + "/open", "unsigned: true"))
        new, old = SECRET, "whsec_MfKQ9r8GKYqrTwjUPD8ILPZIo2LaLaSw"
        (site.folder / "two").write_text(f"  {new}  \n{old}\r\n\n")
        (site.folder / "plain").write_text("just words of the mill, as they are\n")
        site.environment = {"HARROW_HOOK": f"{new} {old}"}
        site.start()
        site.drop("line1", "bad.csv", "nonsense\n")
        wait_until(lambda: len(receiver.taken) == 4, "each route is told")
        for path, secrets in (("/file", (new, old)), ("/env", (new, old)), ("/bytes", ("just words of the mill, as they are",))):
            request = receiver.on(path)[0]
            self.assertEqual(len(request.headers["webhook-signature"].split(" ")), len(secrets))
            for secret in secrets:
                self.assertTrue(verifies(secret, request.headers, request.body, now=request.wall, tolerance=5), path)
            self.assertFalse(verifies("whsec_" + 32 * "A", request.headers, request.body))
        self.assertNotIn("webhook-signature", receiver.on("/open")[0].headers)


class Tls(Delivery):
    def openssl(self, *arguments):
        done = subprocess.run(["openssl", *map(str, arguments)], capture_output=True, text=True, timeout=60, check=False, cwd=self.folder)
        self.assertEqual(done.returncode, 0, done.stderr)

    def make_authority(self, name):
        self.openssl("req", "-x509", "-newkey", "ec", "-pkeyopt", "ec_paramgen_curve:P-256", "-nodes", "-keyout", f"{name}.key",
                     "-out", f"{name}.pem", "-days", "2", "-subj", f"/CN=Harrow Mill {name}", "-addext", "basicConstraints=critical,CA:TRUE")

    def server(self, name, names, authority, days=2):
        """A TLS server's context; its certificate names `names` and is signed by `authority`."""
        self.openssl("req", "-newkey", "ec", "-pkeyopt", "ec_paramgen_curve:P-256", "-nodes", "-keyout", f"{name}.key", "-out",
                     f"{name}.csr", "-subj", f"/CN={name}")
        (self.folder / f"{name}.ext").write_text(f"subjectAltName={names}\nbasicConstraints=CA:FALSE\n")
        self.openssl("x509", "-req", "-in", f"{name}.csr", "-CA", f"{authority}.pem", "-CAkey", f"{authority}.key", "-CAcreateserial",
                     "-days", days, "-extfile", f"{name}.ext", "-out", f"{name}.pem")
        context = ssl.SSLContext(ssl.PROTOCOL_TLS_SERVER)
        context.load_cert_chain(self.folder / f"{name}.pem", self.folder / f"{name}.key")
        return context

    def test_only_a_certificate_that_is_valid_for_the_host_and_signed_by_the_authority_named_is_trusted(self):
        folder = tempfile.TemporaryDirectory(prefix="agreed-tls-")
        self.addCleanup(folder.cleanup)
        self.folder = pathlib.Path(folder.name)
        self.make_authority("ours")
        self.make_authority("strange")
        own = f"secret_file: secret, ca_file: {self.folder}/ours.pem"
        servers = {"good": self.server("good", "IP:127.0.0.1", "ours"),
                   "other-name": self.server("other-name", "DNS:other.harrow.example,IP:127.0.0.2", "ours"),
                   "expired": self.server("expired", "IP:127.0.0.1", "ours", days=-1),
                   "strange": self.server("strange-server", "IP:127.0.0.1", "strange"),
                   "system": self.server("system", "IP:127.0.0.1", "ours")}
        receivers = {name: self.make_scripted({"/hook": [TAKE]}, tls=tls) for name, tls in servers.items()}
        site = self.make_routed("".join(route(name, f"https://127.0.0.1:{receiver.port}/hook", "secret_file: secret" if name == "system" else own)
                                        for name, receiver in receivers.items())).start()
        site.drop("line1", "bad.csv", "nonsense\n")
        wait_until(lambda: receivers["good"].taken, "the one whose certificate is right is told")
        self.check_every_try(receivers["good"].got)
        wait_until(lambda: all(d["tries"] >= 1 for d in self.deliveries(site).values()), "all others are tried")
        for name, delivery in self.deliveries(site).items():
            if name == "good":
                continue
            self.assertEqual((delivery["state"], delivery["last_status"]), ("waiting", None), name)
            self.assertRegex(delivery["last_error"], "TLS|certificate", name)
            self.assertEqual(receivers[name].got, [], f"{name}: nothing is sent before the other side is known")
