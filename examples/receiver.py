"""A small webhook receiver: prints what arrives, its type first. receiver.py PORT_FILE TOLD_FILE

Writes the port it listens on to PORT_FILE, and to TOLD_FILE one line "type kind subject" for each message."""
import http.server
import json
import sys
import textwrap


class Handler(http.server.BaseHTTPRequestHandler):
    def do_POST(self):
        event = json.loads(self.rfile.read(int(self.headers["Content-Length"])))
        data = event.get("data") or {}
        print(f"\n{event['type']}  [{data.get('severity', '')}] {data.get('title', '')}")
        print(textwrap.fill(data.get("text", ""), 100, initial_indent="    ", subsequent_indent="    "), flush=True)
        with open(sys.argv[2], "a", encoding="utf-8") as told:
            told.write(f"{event['type']} {data.get('kind')} {json.dumps(data.get('subject'))}\n")
        self.send_response(204)
        self.end_headers()

    def log_message(self, *args):
        pass


server = http.server.ThreadingHTTPServer(("127.0.0.1", 0), Handler)
with open(sys.argv[1], "w", encoding="utf-8") as port_file:
    port_file.write(str(server.server_address[1]))
try:
    server.serve_forever()
except KeyboardInterrupt:
    pass
