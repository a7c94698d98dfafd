"""A webhook receiver that misbehaves as told: bare sockets, one script for each path, with TLS if wanted."""
import json
import socket
import ssl
import struct
import threading
import time

MOST_ENDLESS = 64 << 20  # what an endless answer offers before it gives up, so that a test ends


class Request:
    """One request as it came."""

    def __init__(self, path, headers, body):
        self.path, self.headers, self.body = path, headers, body
        self.event = json.loads(body)
        self.at = time.monotonic()
        self.wall = time.time()
        self.left_after = None  # seconds until the other side went, where the script waited for that
        self.offered = 0        # bytes of an answer that were sent without an end


def answer(status, *lines, body=b""):
    """A plain answer, with further header lines."""
    def reply(connection, request):
        head = [f"HTTP/1.1 {status} Harrow", f"Content-Length: {len(body)}", "Connection: close", *lines]
        connection.sendall("\r\n".join(head).encode() + b"\r\n\r\n" + body)
    reply.accepts = 200 <= status < 300
    return reply


def raw(bytes_):
    """Exactly these bytes, then the end."""
    return lambda connection, request: connection.sendall(bytes_)


def hang(connection, request):
    """No answer at all."""
    while connection.recv(4096):
        pass
    request.left_after = time.monotonic() - request.at


def reset(connection, request):
    """RST instead of an answer."""
    connection.setsockopt(socket.SOL_SOCKET, socket.SO_LINGER, struct.pack("ii", 1, 0))


def trickle(connection, request):
    """A status line and header fields that come byte by byte and never end."""
    connection.settimeout(0.1)
    for byte in b"HTTP/1.1 200 OK\r\nX: " + b"a" * 10_000:
        try:
            connection.sendall(bytes([byte]))
            if not connection.recv(1):
                break
        except TimeoutError:
            continue
        except OSError:
            break
    request.left_after = time.monotonic() - request.at


def endless(status):
    """A head, then a body without an end."""
    def reply(connection, request):
        connection.sendall(f"HTTP/1.1 {status} Harrow\r\nContent-Type: text/plain\r\n\r\n".encode())
        piece = b"x" * 65536
        try:
            while request.offered < MOST_ENDLESS:
                request.offered += connection.send(piece)
        except OSError:
            pass
    reply.accepts = 200 <= status < 300
    return reply


class Scripted:
    """Answers each request with the next reply of its path's script; the last one is repeated for ever."""

    def __init__(self, scripts, port=0, tls=None):
        self.scripts = {path: list(script) for path, script in scripts.items()}
        self.tls = tls
        self.got = []
        self.taken = []  # those that were answered as taken, in order
        self.refused_tls = 0
        self.lock = threading.Lock()
        self.socket = socket.create_server(("127.0.0.1", port), backlog=64)
        self.port = self.socket.getsockname()[1]
        threading.Thread(target=self.serve, daemon=True).start()

    def serve(self):
        while True:
            try:
                connection, _ = self.socket.accept()
            except OSError:
                return
            threading.Thread(target=self.handle, args=(connection,), daemon=True).start()

    def handle(self, connection):
        with connection:
            connection.settimeout(60)
            if self.tls:
                try:
                    connection = self.tls.wrap_socket(connection, server_side=True)
                except (ssl.SSLError, OSError):
                    self.refused_tls += 1
                    return
            try:
                request = self.read(connection)
                if request is not None:
                    self.reply(connection, request)
            except (OSError, ssl.SSLError):
                pass  # the other side has gone
            finally:
                connection.close()

    @staticmethod
    def read(connection):
        data = b""
        while b"\r\n\r\n" not in data:
            more = connection.recv(65536)
            if not more:
                return None
            data += more
        head, _, body = data.partition(b"\r\n\r\n")
        first, *lines = head.decode().split("\r\n")
        headers = {name.lower(): value.strip() for name, _, value in (line.partition(":") for line in lines)}
        while len(body) < int(headers["content-length"]):
            more = connection.recv(65536)
            if not more:
                return None
            body += more
        return Request(first.split(" ")[1], headers, body)

    def reply(self, connection, request):
        with self.lock:
            self.got.append(request)
            script = self.scripts[request.path]
            reply = script.pop(0) if len(script) > 1 else script[0]
            if getattr(reply, "accepts", False):
                self.taken.append(request)
        reply(connection, request)

    def on(self, path):
        with self.lock:
            return [request for request in self.got if request.path == path]

    def taken_on(self, path):
        with self.lock:
            return [request for request in self.taken if request.path == path]

    def close(self):
        self.socket.close()
