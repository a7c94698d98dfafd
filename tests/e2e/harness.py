"""Starts the real service with real folders, a real webhook receiver and real signals. Standard library only."""
import base64
import http.client
import http.server
import json
import os
import pathlib
import shutil
import signal
import socket
import subprocess
import sys
import tempfile
import threading
import time
import unittest

from signed import verifies

sys.path.insert(0, str(pathlib.Path(__file__).resolve().parents[2] / "examples"))

AGREED = os.environ.get("AGREED", str(pathlib.Path(__file__).resolve().parents[2] / "build" / "agreed"))
SECRET = "whsec_" + base64.b64encode(b"harrow mill test secret, 32 byte").decode()
DEADLINE = float(os.environ.get("AGREED_TEST_DEADLINE", "60"))  # sanitizer builds on a busy machine are slow


def wait_until(condition, what, seconds=None):
    """The first true value of `condition`; fails the test, saying what was waited for, when none comes in time."""
    end = time.monotonic() + (seconds or DEADLINE)
    while True:
        value = condition()
        if value:
            return value
        if time.monotonic() > end:
            raise AssertionError(f"waited in vain until {what}; last seen: {value!r}")
        time.sleep(0.02)


def free_port():
    """A port nobody listens on just now."""
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        return probe.getsockname()[1]


class Receiver:
    """A webhook receiver that keeps what came, checks its signature, and answers as told."""

    def __init__(self, port=0, secret=SECRET):
        self.secret = secret
        self.got = []
        self.answer = 204
        self.lock = threading.Lock()
        outer = self

        class Handler(http.server.BaseHTTPRequestHandler):
            protocol_version = "HTTP/1.1"

            def do_POST(self):
                length = int(self.headers["Content-Length"])
                body = self.rfile.read(length)
                if len(body) < length:  # the sender is gone in the middle of it
                    self.close_connection = True
                    return
                with outer.lock:
                    status = outer.answer(len(outer.got)) if callable(outer.answer) else outer.answer
                    outer.got.append({"path": self.path, "headers": dict(self.headers), "body": body, "event": json.loads(body),
                                      "answered": status, "signed": outer.verify(self.headers, body)})
                self.send_response(status)
                self.send_header("Content-Length", "0")
                self.end_headers()

            def log_message(self, *args):
                pass

        class Server(http.server.ThreadingHTTPServer):
            daemon_threads = True

        self.server = Server(("127.0.0.1", port), Handler)
        self.port = self.server.server_address[1]
        self.thread = threading.Thread(target=self.server.serve_forever, daemon=True)
        self.thread.start()

    def verify(self, headers, body):
        return verifies(self.secret, headers, body)

    def events(self, kind=None, type_=None):
        with self.lock:
            events = [g["event"] for g in self.got if 200 <= g["answered"] < 300]
        return [e for e in events if (kind is None or e["data"].get("kind") == kind) and (type_ is None or e["type"] == type_)]

    def close(self):
        self.server.shutdown()
        self.server.server_close()


CONFIG = """\
site: Harrow Mill
state: state
false_alerts_per_year: 6
listen: {{address: 127.0.0.1, port: {port}}}
analyzers:
  line1: {{inbox: drop/line1, settle: 200ms, rescan: {rescan}}}
  line2: {{inbox: drop/line2, settle: 200ms, rescan: {rescan}}}
measurands:
  protein:
    unit: g/100 g
    decimals: {decimals}
    decision_levels: [10.5, 13.0]
    allowable_difference: {{absolute: 0.2, percent: 1.5}}
check_standards:
  wheat-low:
    lot: 2026-A
    every: 8h
    measurands: {{protein: {{reference: 10.62, expanded_uncertainty: 0.08}}}}
  wheat-high:
    lot: 2026-A
    every: 8h
    measurands: {{protein: {{}}}}
comparisons:
  protein: {{measurand: protein, x: line1, y: line2, every: 2h}}
alerts:
  remind_every: 8h
  routes:
{routes}
"""


class Site:
    """A folder with a configuration and inboxes, and the service on it."""

    def __init__(self, receiver_port=None, port=0, rescan="1s", decimals=2, config=None):
        self.folder = pathlib.Path(tempfile.mkdtemp(prefix="agreed-e2e-"))
        for analyzer in ("line1", "line2"):
            (self.folder / "drop" / analyzer).mkdir(parents=True)
        (self.folder / "secret").write_text(SECRET + "\n")
        routes = "    []" if receiver_port is None else \
            f"    - {{name: engineer, url: 'http://127.0.0.1:{receiver_port}/hook', secret_file: secret}}"
        self.config = self.folder / "agreed.yaml"
        self.config.write_text(config or CONFIG.format(port=port, rescan=rescan, decimals=decimals, routes=routes))
        self.process = None
        self.base = None
        self.environment = {}  # what the service gets beside this process's own

    def start(self, wait_ready=True, user=None, within=()):
        """`within`: a command that ends in becoming the one it is given, the service."""
        if hasattr(self, "log"):
            self.log.close()
        self.log = open(self.folder / "log", "ab")
        self.process = subprocess.Popen([*within, AGREED, "run", str(self.config)], stdout=subprocess.PIPE, stderr=self.log, user=user,
                                        env={**os.environ, **self.environment})
        line = self.process.stdout.readline().decode()
        if "http://" not in line:
            self.process.wait(10)
            raise AssertionError(f"the service did not start: {line!r}\n{(self.folder / 'log').read_text()[-3000:]}")
        self.base = "http://" + line.split("http://")[1].split()[0].rstrip("/")
        if wait_ready:
            wait_until(lambda: self.status_code("/health/ready") == 200, "the service is ready")
        return self

    def kill(self):
        self.process.send_signal(signal.SIGKILL)
        self.process.wait()
        self.process.stdout.close()

    def stop(self, within=10):
        """SIGTERM; the exit code and how long it took."""
        if self.process is None or self.process.poll() is not None:
            return None
        begun = time.monotonic()
        self.process.send_signal(signal.SIGTERM)
        code = self.process.wait(within)
        self.process.stdout.close()
        return code, time.monotonic() - begun

    def close(self):
        try:
            if self.process is not None and self.process.poll() is None:
                self.kill()
        finally:
            self.log.close() if hasattr(self, "log") else None
            if not os.environ.get("AGREED_KEEP"):
                shutil.rmtree(self.folder, ignore_errors=True)

    def request(self, path, method="GET", body=None, headers=None):
        """(status, headers, body bytes)."""
        host = self.base.removeprefix("http://")
        connection = http.client.HTTPConnection(host, timeout=20)
        try:
            connection.request(method, path, body=body, headers=headers or {})
            response = connection.getresponse()
            return response.status, dict(response.getheaders()), response.read()
        finally:
            connection.close()

    def status_code(self, path):
        try:
            return self.request(path)[0]
        except OSError:
            return None

    def get(self, path):
        status, _, body = self.request(path)
        if status != 200:
            raise AssertionError(f"{path}: {status} {body[:500]!r}")
        return json.loads(body)

    def drop(self, analyzer, name, text):
        """Writes a file beside the inbox and renames it in, as a careful writer does."""
        inbox = self.folder / "drop" / analyzer
        temporary = self.folder / f".{analyzer}-{name}"
        temporary.write_bytes(text if isinstance(text, bytes) else text.encode())
        os.rename(temporary, inbox / name)

    @staticmethod
    def drop_into(folder, name, text):
        """The same for any folder."""
        temporary = folder / f".{name}"
        temporary.write_text(text)
        os.rename(temporary, folder / name)

    def inbox(self, analyzer):
        return self.folder / "drop" / analyzer

    def files_in(self, analyzer, sub):
        folder = self.inbox(analyzer) / sub
        return sorted(p.name for p in folder.rglob("*") if p.is_file()) if folder.exists() else []

    def wait_taken(self, what="every file is taken in", seconds=None):
        def nothing_waits():
            left = [p for a in ("line1", "line2") for p in self.inbox(a).iterdir() if p.is_file() and not p.name.startswith(".")]
            return not left and self.get("/api/status")["intake"]["pending_files"] == 0
        wait_until(nothing_waits, what, seconds)


class SiteTest(unittest.TestCase):
    """A test with a receiver and a site that are always cleared away."""

    def make_site(self, **options):
        site = Site(**options)
        self.addCleanup(site.close)
        return site

    def make_receiver(self, **options):
        receiver = Receiver(**options)
        self.addCleanup(receiver.close)
        return receiver
