"""Behind deploy/nginx/agreed.conf, a real nginx with TLS on a free port: page, API and acknowledgements reach the service."""
import hashlib
import http.client
import http.server
import json
import os
import pathlib
import shutil
import ssl
import subprocess
import tempfile
import threading

from harness import SiteTest, free_port, wait_until

CONFIGURATION = pathlib.Path(__file__).resolve().parents[2] / "deploy" / "nginx" / "agreed.conf"
NAME = "agreed.harrow.example"
OPERATOR, READER = "agreed_operator%41", "agreed_reader"
MAIN = """\
daemon off;
worker_processes 1;
pid {folder}/nginx.pid;
error_log {folder}/error.log info;
events {{ worker_connections 256; }}
http {{
    access_log {folder}/access.log;
    client_body_temp_path {folder}/body;
    proxy_temp_path {folder}/proxy;
    fastcgi_temp_path {folder}/fastcgi;
    uwsgi_temp_path {folder}/uwsgi;
    scgi_temp_path {folder}/scgi;
    include {folder}/agreed.conf;
}}
"""


class Proxy:
    """nginx with the packaged configuration, its names and ports put in, before `upstream`; never as root."""

    def __init__(self, upstream):
        self.folder = pathlib.Path(tempfile.mkdtemp(prefix="agreed-nginx-"))
        self.plain, self.port = free_port(), free_port()
        subprocess.run(["openssl", "req", "-x509", "-newkey", "ec", "-pkeyopt", "ec_paramgen_curve:P-256", "-nodes", "-keyout",
                        "agreed.key", "-out", "agreed.pem", "-days", "2", "-subj", f"/CN={NAME}", "-addext", f"subjectAltName=DNS:{NAME}"],
                       cwd=self.folder, check=True, capture_output=True)
        self.write_configuration(upstream)
        user = None
        if os.geteuid() == 0:
            user = 65534
            for path in (self.folder, *self.folder.iterdir()):
                os.chown(path, user, -1)
        program = shutil.which("nginx", path=os.environ["PATH"] + ":/usr/sbin:/sbin")
        if program is None:
            raise AssertionError("nginx is not installed: sh deploy/setup.sh")
        self.process = subprocess.Popen([program, "-e", f"{self.folder}/start.log", "-p", str(self.folder), "-c", f"{self.folder}/nginx.conf"],
                                        user=user, stderr=subprocess.DEVNULL)
        wait_until(self.answers, f"nginx listens; {self.log()}")

    def write_configuration(self, upstream):
        lines = [line for line in CONFIGURATION.read_text().splitlines(keepends=True) if "listen [::]" not in line]
        text = "".join(lines)
        for packaged, here in (("listen 80;", f"listen 127.0.0.1:{self.plain};"), ("listen 443 ", f"listen 127.0.0.1:{self.port} "),
                               ("server 127.0.0.1:7480;", f"server {upstream};"),
                               ("/etc/ssl/certs/agreed.pem", f"{self.folder}/agreed.pem"),
                               ("/etc/ssl/private/agreed.key", f"{self.folder}/agreed.key")):
            assert text.count(packaged) == 1, packaged
            text = text.replace(packaged, here)
        (self.folder / "agreed.conf").write_text(text)
        (self.folder / "nginx.conf").write_text(MAIN.format(folder=self.folder))

    def log(self):
        return "".join(p.read_text() for p in self.folder.glob("*.log"))

    def answers(self):
        if self.process.poll() is not None:
            raise AssertionError(f"nginx ended: {self.log()}")
        try:
            self.ask("/health/live")
            return True
        except OSError:
            return False

    def ask(self, path, method="GET", body=None, **headers):
        """(status, headers, body) over TLS, the certificate verified under its name."""
        context = ssl.create_default_context(cafile=self.folder / "agreed.pem")
        raw = http.client.socket.create_connection(("127.0.0.1", self.port), timeout=20)
        connection = http.client.HTTPSConnection(NAME, self.port, timeout=20, context=context)
        connection.sock = context.wrap_socket(raw, server_hostname=NAME)
        try:
            connection.request(method, path, body=body, headers={"Host": NAME, **{k.replace("_", "-"): v for k, v in headers.items()}})
            answer = connection.getresponse()
            return answer.status, {k.lower(): v for k, v in answer.getheaders()}, answer.read()
        finally:
            connection.close()

    def close(self):
        self.process.terminate()
        self.process.wait(20)
        shutil.rmtree(self.folder, ignore_errors=True)


class Echo(http.server.BaseHTTPRequestHandler):
    """Answers with the header fields and the body it got, and sets a cookie."""
    protocol_version = "HTTP/1.1"

    def do_POST(self):
        body = self.rfile.read(int(self.headers["Content-Length"]))
        answer = json.dumps({"headers": {k.lower(): v for k, v in self.headers.items()}, "body": body.decode()}).encode()
        self.send_response(200)
        self.send_header("Content-Length", str(len(answer)))
        self.send_header("Set-Cookie", "agreed=x; Path=/; HttpOnly; SameSite=Strict")
        self.end_headers()
        self.wfile.write(answer)

    def log_message(self, *args):
        pass


class BehindProxy(SiteTest):
    def make_proxy(self, upstream):
        proxy = Proxy(upstream)
        self.addCleanup(proxy.close)
        return proxy

    def make_proxied_site(self):
        site = self.make_site()
        (site.folder / "tokens").write_text("".join(f"{role} {role} {hashlib.sha256(token.encode()).hexdigest()}\n"
                                                    for role, token in (("operator", OPERATOR), ("reader", READER))))
        text = site.config.read_text().replace("port: 0}", "port: 0, behind_proxy: true}")
        site.config.write_text(text + "access: {tokens_file: tokens}\n")
        site.start()
        return site, self.make_proxy(site.base.removeprefix("http://"))

    def test_page_api_and_acknowledgement_through_the_proxy(self):
        site, proxy = self.make_proxied_site()
        reader, operator = {"Authorization": f"Bearer {READER}"}, {"Authorization": f"Bearer {OPERATOR}"}
        site.drop("line1", "bad.csv", "nonsense\n")
        status, headers, _ = proxy.ask("/api/status")
        self.assertEqual((status, headers["www-authenticate"].split(" ")[0]), (401, "Bearer"))
        alert = wait_until(lambda: json.loads(proxy.ask("/api/alerts", **reader)[2])["alerts"], "the alert is there")[0]
        status, headers, body = proxy.ask("/", **reader)
        self.assertEqual(status, 200)
        self.assertIn("text/html", headers["content-type"])
        self.assertIn(b"Harrow Mill", body)
        self.assertEqual(headers["strict-transport-security"], "max-age=31536000")
        self.assertIn("default-src", headers["content-security-policy"])
        self.assertEqual(headers["server"], "nginx")
        status, headers, body = proxy.ask("/api/charts", **reader)
        self.assertEqual((status, headers["strict-transport-security"]), (200, "max-age=31536000"))
        self.assertEqual(len(json.loads(body)["charts"]), 4)
        self.assertEqual(proxy.ask("/api/charts", If_None_Match=headers["etag"], **reader)[::2], (304, b""))
        acknowledge, note = f"/api/alerts/{alert['id']}/acknowledge", json.dumps({"by": "K. Byrne", "note": "sent again"})
        self.assertEqual(proxy.ask(acknowledge, "POST", note)[0], 401)
        self.assertEqual(proxy.ask(acknowledge, "POST", note, **reader)[0], 403)
        pieces = iter([note[:10].encode(), note[10:].encode()])  # http.client sends it in chunks; agreed gets it whole
        status, _, body = proxy.ask(acknowledge, "POST", pieces, Content_Type="application/json", **operator)
        self.assertEqual((status, json.loads(body)["acknowledged"]["by"]), (200, "K. Byrne"))
        status, headers, _ = proxy.ask("/nothing", **reader)
        self.assertEqual((status, headers["content-type"]), (404, "application/problem+json"))
        done = subprocess.run(["curl", "--silent", "--http2", "--cacert", f"{proxy.folder}/agreed.pem", "--resolve", f"{NAME}:{proxy.port}:127.0.0.1",
                               "--write-out", " HTTP/%{http_version}", f"https://{NAME}:{proxy.port}/health/live"],
                              capture_output=True, text=True, timeout=30, check=True)
        self.assertTrue(done.stdout.endswith(" HTTP/2"), done.stdout)

    def test_what_the_proxy_keeps_away(self):
        site, proxy = self.make_proxied_site()
        plain = http.client.HTTPConnection("127.0.0.1", proxy.plain, timeout=20)
        plain.request("GET", "/alerts?x=1", headers={"Host": NAME})
        answer = plain.getresponse()
        self.assertEqual((answer.status, answer.getheader("Location")), (301, f"https://{NAME}/alerts?x=1"))
        plain.close()
        self.assertEqual(proxy.ask("/api/alerts/1/acknowledge", "POST", "x" * 16_400)[0], 413)
        guesses = [proxy.ask("/api/alerts/1/acknowledge", "POST", "{}", Authorization=f"Bearer {i}")[0] for i in range(30)]
        self.assertEqual(set(guesses), {401, 429})
        self.assertLess(guesses.count(401), 20, "tokens cannot be guessed fast")
        site.stop()
        status, headers, _ = proxy.ask("/health/live")
        self.assertEqual((status, headers["strict-transport-security"]), (502, "max-age=31536000"))

    def test_what_passes_through(self):
        echo = http.server.ThreadingHTTPServer(("127.0.0.1", 0), Echo)
        echo.daemon_threads = True
        threading.Thread(target=echo.serve_forever, daemon=True).start()
        self.addCleanup(echo.server_close)
        self.addCleanup(echo.shutdown)
        proxy = self.make_proxy(f"127.0.0.1:{echo.server_address[1]}")
        status, headers, body = proxy.ask("/", "POST", iter([b"a" * 5000, b"b" * 5000]), Authorization="Bearer a%0d", Cookie="agreed=1; b=2",
                                          If_None_Match='"e"', Accept="text/csv", Accept_Encoding="gzip", Range="bytes=0-1")
        self.assertEqual(status, 200)
        got = json.loads(body)
        self.assertEqual(got["body"], "a" * 5000 + "b" * 5000)
        self.assertEqual({k: got["headers"].get(k) for k in ("authorization", "cookie", "if-none-match", "accept", "content-length", "host")},
                         {"authorization": "Bearer a%0d", "cookie": "agreed=1; b=2", "if-none-match": '"e"', "accept": "text/csv",
                          "content-length": "10000", "host": NAME})
        self.assertFalse({"transfer-encoding", "accept-encoding", "range", "connection"} & set(got["headers"]))
        for part in ("agreed=x", "secure", "httponly", "samesite=strict"):
            self.assertIn(part, headers["set-cookie"].lower())
