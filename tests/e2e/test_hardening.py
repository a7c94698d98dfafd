"""What a client over the network can do to the service: nothing. Each weakness of the packaged HTTP library, and of servers
like it, is tried over real sockets on the real executable."""
import errno
import hashlib
import json
import random
import socket
import subprocess
import threading
import time

import faults
from faults import Faults
from harness import AGREED, SiteTest, wait_until
from hostile import Client, ask, get, is_sanitized, memory_mb, post, seconds_of, statuses
from plant import START, csv, rfc3339

STATUS = get("/api/status")
PROTEIN = "protein"
ACKNOWLEDGE = "/api/alerts/1/acknowledge"
BODY = b'{"by": "K. Byrne", "note": "looked at"}'
REQUEST_DEADLINE = 5.0  # seconds from a request's first byte to its last
STRANGE_TOKEN = "harrow%41%0d%0amill+%%"


def checks(first, count):
    return csv([("check", rfc3339(START + i), PROTEIN, "wheat-low", 10.6) for i in range(first, first + count)])


class HardenedSite(SiteTest):
    def make_hardened(self):
        self.site = site = self.make_site()
        (site.folder / "tokens").write_text(f"operator shift {hashlib.sha256(STRANGE_TOKEN.encode()).hexdigest()}\n")
        site.config.write_text(site.config.read_text() + "access: {tokens_file: tokens}\n")
        return site

    def check_well(self):
        self.assertIsNone(self.site.process.poll(), "the service lives")
        took = seconds_of(lambda: self.assertEqual(ask(self.site, STATUS).status, 200))
        self.assertLess(took, 1.0, "and answers at once")

    def check_refused(self, data, status, **headers):
        """Answered with `status`, as a problem document, and the connection is closed: what follows is never a request."""
        with Client(self.site) as client:
            client.send(data)
            everything = client.to_end()
        self.assertEqual(statuses(everything), [status], data[:80])
        head, _, body = everything.partition(b"\r\n\r\n")
        self.assertIn(b"Connection: close", head)
        self.assertIn(b"application/problem+json", head)
        self.assertEqual(json.loads(body)["status"], status)


class Requests(HardenedSite):
    def setUp(self):
        self.make_hardened().start()

    def tearDown(self):
        self.check_well()

    def test_an_endless_header_line_and_an_endless_request_line_cost_no_memory(self):
        before = memory_mb(self.site, "VmHWM")
        piece = b"a" * 65536
        for begin in (b"GET / HTTP/1.1\r\nHost: h\r\nX: ", b"GET /", b"a"):
            with Client(self.site) as client:
                client.send(begin)
                sent = 0
                while sent < 60 << 20 and client.send(piece):
                    sent += len(piece)
                self.assertLess(sent, 20 << 20, "it is cut off long before 60 MB")
        if not is_sanitized(self.site):
            self.assertLess(memory_mb(self.site, "VmHWM") - before, 8)

    def test_heads_beyond_the_limits(self):
        self.check_refused(get("/", "X: " + 9000 * "a"), 431)
        self.check_refused(get("/", *["A: b"] * 65), 431)
        self.check_refused(get("/", *["A: b"] * 20_000), 431)
        self.check_refused(get("/" + 2048 * "a"), 414)
        self.check_refused(get("/" + 80_000 * "a"), 414)
        for path in ("(" * 2000, "a/" * 1000, "%00" * 600, "%2e%2e/" * 200, "*.?+[]{}|^$\\" * 60, "((a+)+)+b" * 200):
            self.assertIn(ask(self.site, get("/api/charts/" + path.replace("?", ""))).status, (404,), path[:20])

    def test_doubtful_requests(self):
        for head, status in ((b"GET / HTTP/1.1\r\n\r\n", 400),
                             (b"GET / HTTP/1.1\r\nHost: a\r\nHost: b\r\n\r\n", 400),
                             (b"GET / HTTP/1.1\r\nHost: h\r\nA : b\r\n\r\n", 400),
                             (b"GET / HTTP/1.1\r\nHost: h\r\nA: b\r\n folded\r\n\r\n", 400),
                             (b"GET / HTTP/1.1\r\nHost: h\r\nA: b\nX: c\r\n\r\n", 400),
                             (b"GET / HTTP/1.1\r\nHost: h\r\nA: \0\r\n\r\n", 400),
                             (b"GET http://elsewhere/ HTTP/1.1\r\nHost: h\r\n\r\n", 400),
                             (b"CONNECT elsewhere:443 HTTP/1.1\r\nHost: h\r\n\r\n", 400),
                             (b"GET / HTTP/2.0\r\nHost: h\r\n\r\n", 505),
                             (b"PRI * HTTP/2.0\r\n\r\nSM\r\n\r\n", 400),
                             (b"BREW / HTTP/1.1\r\nHost: h\r\n\r\n", 501),
                             (b"\x16\x03\x01\x02\x00\x01\x00\r\n\r\n", 400)):
            self.check_refused(head, status)

    def test_bodies_whose_end_is_in_doubt_or_that_grow(self):
        chunked = b"27\r\n" + BODY + b"\r\n0\r\n\r\n"
        self.check_refused(post(ACKNOWLEDGE, chunked, "Transfer-Encoding: chunked"), 411)
        self.check_refused(post(ACKNOWLEDGE, chunked, "transfer-encoding: gzip, CHUNKED"), 411)
        self.check_refused(post(ACKNOWLEDGE, BODY, "Transfer-Encoding: chunked", f"Content-Length: {len(BODY)}"), 400)
        for lengths in ((len(BODY), len(BODY)), (len(BODY), 0)):
            self.check_refused(post(ACKNOWLEDGE, BODY, *[f"Content-Length: {n}" for n in lengths]), 400)
        for length in ("-1", "+1", "0x10", "1,1", "", "1 1"):
            self.check_refused(post(ACKNOWLEDGE, BODY, f"Content-Length: {length}"), 400)
        self.check_refused(post(ACKNOWLEDGE, BODY), 411)
        self.check_refused(post(ACKNOWLEDGE, BODY, f"Content-Length: {len(BODY)}", "Content-Encoding: gzip"), 415)
        self.check_refused(post(ACKNOWLEDGE, BODY, f"Content-Length: {2 ** 70}"), 413)

    def test_a_body_beyond_the_limit_is_refused_at_once_and_not_read(self):
        with Client(self.site) as client:
            client.send(post(ACKNOWLEDGE, b"", "Content-Length: 100000000"))
            took = seconds_of(lambda: self.assertEqual(client.answer().status, 413))
            self.assertLess(took, 1.0)
            client.to_end()

    def test_what_follows_a_refused_request_is_never_a_second_one(self):
        smuggled = get("/api/alerts") * 200
        self.check_refused(post(ACKNOWLEDGE, b"x" * 5000 + smuggled, "Content-Length: 50000"), 413)
        self.check_refused(post(ACKNOWLEDGE, b"5\r\nabcde\r\n0\r\n\r\n" + smuggled, "Transfer-Encoding: chunked"), 411)
        # A refusal by the token reads the body over; what follows it is a request of its own.
        with Client(self.site) as client:
            client.send(post(ACKNOWLEDGE, smuggled[:4000], "Content-Length: 4000") + STATUS)
            self.assertEqual([client.answer().status, client.answer().status], [401, 200])

    def test_requests_in_one_piece_are_all_answered_in_order(self):
        paths = ["/api/status", "/api/nothing", "/health/live", "/api/charts", "/api/alerts/7"] * 4
        with Client(self.site) as client:
            client.send(b"".join(map(get, paths)))
            answers = [client.answer() for _ in paths]
        self.assertEqual([a.status for a in answers], [200, 404, 200, 200, 404] * 4)
        self.assertIn("charts", json.loads(answers[3].body))

    def test_versions_and_the_end_of_a_connection(self):
        for head in (get("/health/live", "Connection: Close"), get("/health/live", "connection: keep-alive, CLOSE"),
                     b"GET /health/live HTTP/1.0\r\n\r\n", b"GET /health/live HTTP/1.0\r\nConnection: keep-alive\r\n\r\n"):
            with Client(self.site) as client:
                client.send(head + STATUS)
                self.assertEqual(statuses(client.to_end()), [200], head)
        with Client(self.site) as client:
            for _ in range(3):
                client.send(STATUS)
                self.assertEqual(client.answer().status, 200)

    def test_head_is_get_without_its_body(self):
        whole = ask(self.site, get("/api/comparisons"))
        with Client(self.site) as client:
            client.send(get("/api/comparisons").replace(b"GET", b"HEAD", 1) + get("/health/live"))
            head = client.answer(head_only=True)
            self.assertEqual(client.answer().status, 200, "nothing of a body stood between")
        self.assertEqual(head.status, 200)
        for name in ("content-length", "content-type", "etag"):
            self.assertEqual(head.headers[name], whole.headers[name])

    def test_other_methods_are_told_which_ones_there_are(self):
        for method in ("PUT", "DELETE", "PATCH", "OPTIONS", "TRACE"):
            for path, allowed in (("/api/status", "GET, HEAD"), ("/", "GET, HEAD"), (ACKNOWLEDGE, "POST")):
                answer = ask(self.site, get(path, "Content-Length: 0").replace(b"GET", method.encode(), 1))
                self.assertEqual((answer.status, answer.headers["allow"]), (405, allowed), (method, path))
        self.assertEqual(ask(self.site, get(ACKNOWLEDGE)).headers["allow"], "POST")

    def test_ranges_multiply_nothing(self):
        whole = ask(self.site, get("/api/charts"))
        for ranges in ("0-", "0-9", "0-," * 50 + "0-", "9-0", "-5"):
            answer = ask(self.site, get("/api/charts", f"Range: bytes={ranges}"))
            self.assertEqual((answer.status, answer.body), (200, whole.body), ranges)

    def test_values_of_headers_stay_what_they_are(self):
        ask_with = lambda token: ask(self.site, post(ACKNOWLEDGE, BODY, f"Authorization: Bearer {token}", f"Content-Length: {len(BODY)}"))
        self.assertEqual(ask_with(STRANGE_TOKEN).status, 404, "a token with % is that token")
        self.assertEqual(ask_with("harrowA%0d%0amill+%%").status, 401)
        for lines in (["X: %0D%0ASet-Cookie: a=b"], ["If-None-Match: %22x%22%0d%0aSet-Cookie: a=b"], ["REMOTE_ADDR: 203.0.113.9"],
                      ["LOCAL_ADDR: 203.0.113.9", "REMOTE_PORT: 1"]):
            answer = ask(self.site, get("/api/charts", *lines))
            self.assertEqual(answer.status, 200)
            self.assertFalse({"set-cookie", "remote_addr", "local_addr"} & set(answer.headers))
        self.assertNotIn("203.0.113.9", (self.site.folder / "log").read_text())
        etag = ask(self.site, get("/api/charts")).headers["etag"]
        self.assertEqual(ask(self.site, get("/api/charts", f"If-None-Match: {etag}")).status, 304)

    def test_a_head_or_a_body_that_trickles_is_ended_by_one_deadline(self):
        begun = time.monotonic()
        slow = {}
        for name, data in (("head", b"GET /api/status HTTP/1.1\r\nHost: harrow\r\nX: "),
                           ("body", post(ACKNOWLEDGE, b"", "Content-Length: 9000")),
                           ("waits for 100", post(ACKNOWLEDGE, b"", "Content-Length: 9000", "Expect: 100-continue"))):
            slow[name] = Client(self.site, timeout=0.05)
            self.addCleanup(slow[name].socket.close)
            slow[name].send(data)
        ended = {}
        while len(ended) < len(slow) and time.monotonic() - begun < 30:
            for name, client in slow.items():
                if name in ended:
                    continue
                client.send(b"a")
                try:
                    if not client.more():
                        ended[name] = time.monotonic() - begun
                except TimeoutError:
                    pass
        for name, client in slow.items():
            self.assertEqual(statuses(client.kept), [100, 408] if name == "waits for 100" else [408], name)
            self.assertGreater(ended[name], REQUEST_DEADLINE - 1, name)
            self.assertLess(ended[name], REQUEST_DEADLINE + 6, name)


class Trouble(HardenedSite):
    def test_what_went_wrong_inside_is_told_to_the_log_and_never_to_the_client(self):
        site = self.make_hardened()
        calls = Faults(site)
        self.addCleanup(calls.close)
        site.start()
        calls.arm(faults.OPEN | faults.CREATE | faults.READ, faults.FAIL_FROM_THERE_ON, target=1, error=errno.EIO)
        answer = ask(site, get("/api/alerts/1"))
        calls.disarm()
        self.assertGreater(calls.hits, 0)
        self.assertEqual((answer.status, answer.headers["content-type"]), (500, "application/problem+json"))
        for word in (b"sqlite", b"journal", str(site.folder).encode(), b"I/O", b"error:", b"what"):
            self.assertNotIn(word, answer.body.lower() if word.islower() else answer.body)
        self.assertFalse([name for name in answer.headers if "exception" in name])
        self.assertIn("journal", (site.folder / "log").read_text())
        self.assertEqual(ask(site, get("/api/alerts/1")).status, 404)
        self.check_well()

    def test_a_port_in_use_is_refused_also_while_its_owner_serves(self):
        site = self.make_hardened().start()
        other = self.make_site(port=int(site.base.rsplit(":", 1)[1]))
        done = subprocess.run([AGREED, "run", str(other.config)], capture_output=True, text=True, timeout=60, check=False)
        self.assertEqual(done.returncode, 3)
        self.assertIn("in use", done.stderr)
        with socket.socket() as sharing:  # not even one that asks for it can sit beside us
            sharing.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEPORT, 1)
            with self.assertRaises(OSError):
                sharing.bind(("127.0.0.1", int(site.base.rsplit(":", 1)[1])))
        self.check_well()


class Crowds(HardenedSite):
    def connect(self, count, begin, **options):
        """So many clients; `begin` does something with each."""
        clients = [Client(self.site, **options) for _ in range(count)]
        for client in clients:
            self.addCleanup(client.socket.close)
            begin(client)
        return clients

    @staticmethod
    def keep(client):
        client.send(STATUS)
        client.answer()

    def test_64_clients_that_are_slow_silent_or_idle_do_not_keep_the_65th_waiting(self):
        self.make_hardened().start()
        for begin in (lambda c: None, lambda c: c.send(b"GET / HTTP/1.1\r\nHost: h\r\nX: a"),
                      lambda c: c.send(post(ACKNOWLEDGE, b"a", "Content-Length: 1000")), self.keep):
            self.connect(64, begin)
            self.check_well()

    def test_sigterm_with_64_clients_connected_ends_it_within_two_seconds(self):
        self.make_hardened().start()
        self.site.drop("line1", "many.csv", checks(0, 5000))
        self.site.wait_taken()
        large = get("/api/readings?limit=5000")
        self.connect(16, lambda c: None)
        self.connect(16, self.keep)
        self.connect(16, lambda c: c.send(b"POST / HTTP/1.1\r\nHost: h\r\nContent-Length: 100\r\n\r\nhalf"))
        loading = self.connect(16, lambda c: c.send(large), receive_buffer=4096)
        for client in loading:
            self.assertTrue(client.more(), "the download has begun")
        code, seconds = self.site.stop()
        self.assertEqual(code, 0)
        self.assertLess(seconds, 2.0)

    def test_64_clients_with_slow_broken_and_oversize_requests_while_readings_flow(self):
        site = self.make_hardened().start()
        end = time.monotonic() + 6
        troubles = []

        def hostile(seed):
            chance = random.Random(seed)
            try:
                while time.monotonic() < end:
                    self.misbehave(chance, end)
            except TimeoutError:
                troubles.append(f"client {seed}: no answer")
        before = memory_mb(site)
        threads = [threading.Thread(target=hostile, args=(i,)) for i in range(64)]
        for thread in threads:
            thread.start()
        dropped, worst = 0, 0.0
        while time.monotonic() < end:
            site.drop("line1", f"{dropped}.csv", checks(100 * dropped, 100))
            dropped += 1
            worst = max(worst, seconds_of(lambda: self.assertEqual(ask(site, STATUS).status, 200)))
            time.sleep(0.05)
        for thread in threads:
            thread.join(30)
        site.wait_taken()
        self.assertEqual(troubles, [])
        readings = site.get("/api/status")["intake"]["readings"]
        self.assertEqual((readings["accepted"], readings["rejected"]), (100 * dropped, 0))
        self.assertEqual(site.files_in("line1", "rejected"), [])
        self.assertLess(worst, 5.0, "an honest client was answered all the while")
        if not is_sanitized(site):
            self.assertLess(memory_mb(site) - before, 250, "eight workers with a large answer each, and what waits to be taken")
        wait_until(lambda: site.status_code("/health/ready") == 200, "it is ready")
        self.check_well()
        self.assertEqual(site.stop()[0], 0)

    def misbehave(self, chance, end):
        """One connection of a client that is up to no good."""
        kind = chance.randrange(8)
        with Client(self.site, timeout=15) as client:
            if kind == 0:    # random bytes
                client.send(chance.randbytes(chance.randrange(1, 20_000)))
                client.socket.shutdown(socket.SHUT_WR)
                client.to_end()
            elif kind == 1:  # a slow head
                for byte in get("/api/charts"):
                    if time.monotonic() > end or not client.send(bytes([byte])):
                        return
                    time.sleep(0.01)
                client.answer()
            elif kind == 2:  # too much
                client.send(post(ACKNOWLEDGE, b"x" * 50_000, "Content-Length: 50000000"))
                self.assertIn(getattr(client.answer(), "status", 413), (413,))
            elif kind == 3:  # asks for much and goes
                client.send(get("/api/readings?limit=5000") * 5)
            elif kind == 4:  # half a request
                client.send(STATUS[:chance.randrange(len(STATUS))])
            elif kind == 5:  # chunks
                client.send(post(ACKNOWLEDGE, b"ffffffff\r\n" + b"x" * 1000, "Transfer-Encoding: chunked"))
                client.answer()
            elif kind == 6:  # many at once, honest
                client.send(STATUS * 20)
                for _ in range(20):
                    client.answer()
            else:            # one byte changed
                data = bytearray(get("/api/comparisons/protein?pairs=20", "Accept: */*"))
                data[chance.randrange(len(data))] = chance.randrange(256)
                client.send(bytes(data))
                client.socket.shutdown(socket.SHUT_WR)
                client.to_end()
