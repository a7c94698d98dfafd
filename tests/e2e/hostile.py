"""Clients made of bare sockets: they send any bytes and show exactly what came back."""
import re
import socket
import time


class Client:
    def __init__(self, site, timeout=20.0, receive_buffer=0):
        host, port = site.base.removeprefix("http://").split(":")
        self.socket = socket.socket()
        if receive_buffer:
            self.socket.setsockopt(socket.SOL_SOCKET, socket.SO_RCVBUF, receive_buffer)
        self.socket.settimeout(timeout)
        self.socket.connect((host, int(port)))
        self.socket.setsockopt(socket.IPPROTO_TCP, socket.TCP_NODELAY, 1)
        self.kept = b""
        self.ended = False

    def __enter__(self):
        return self

    def __exit__(self, *_):
        self.socket.close()

    def send(self, data):
        """False when the other side has gone."""
        try:
            self.socket.sendall(data)
            return True
        except OSError:
            return False

    def more(self):
        try:
            data = self.socket.recv(65536)
        except ConnectionError:
            data = b""
        self.kept += data
        self.ended = self.ended or not data
        return bool(data)

    def answer(self, head_only=False):
        """The next answer by its Content-Length, or None at the end."""
        while b"\r\n\r\n" not in self.kept:
            if not self.more():
                return None
        head, _, rest = self.kept.partition(b"\r\n\r\n")
        answer = Answer(head)
        length = 0 if head_only or answer.status in (100, 204, 304) else int(answer.headers.get("content-length", 0))
        while len(rest) < length:
            if not self.more():
                break
            rest = self.kept.partition(b"\r\n\r\n")[2]
        answer.body, self.kept = rest[:length], rest[length:]
        return answer

    def to_end(self):
        """All that still comes until the other side ends."""
        while self.more():
            pass
        data, self.kept = self.kept, b""
        return data


class Answer:
    def __init__(self, head):
        first, *lines = head.decode("latin-1").split("\r\n")
        self.status = int(first.split(" ")[1])
        self.headers = {name.lower(): value.strip() for name, _, value in (line.partition(":") for line in lines)}
        self.body = b""


def get(path, *lines, version="1.1"):
    return "\r\n".join([f"GET {path} HTTP/{version}", "Host: harrow", *lines, "", ""]).encode("latin-1")


def post(path, body, *lines):
    return "\r\n".join([f"POST {path} HTTP/1.1", "Host: harrow", *lines, "", ""]).encode("latin-1") + body


def ask(site, data, head_only=False):
    """One answer over a connection of its own."""
    with Client(site) as client:
        client.send(data)
        return client.answer(head_only)


def statuses(data):
    """Those of all answers in what came."""
    return [int(s) for s in re.findall(rb"HTTP/1\.1 (\d{3}) ", data)]


def seconds_of(what):
    begun = time.monotonic()
    what()
    return time.monotonic() - begun


def memory_mb(site, field="VmRSS"):
    with open(f"/proc/{site.process.pid}/status", encoding="ascii") as lines:
        return next(int(line.split()[1]) / 1024 for line in lines if line.startswith(field))


def is_sanitized(site):
    """Whether the service was built with a sanitizer, which keeps freed memory on purpose."""
    with open(f"/proc/{site.process.pid}/maps", encoding="utf-8") as maps:
        return any(name in line for line in maps for name in ("libasan", "libtsan"))
