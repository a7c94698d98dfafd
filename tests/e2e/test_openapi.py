"""The description of the API is what the service does: every path, every answer, and no field that it does not know."""
import copy
import hashlib
import json
import pathlib
import re
import sqlite3

from jsonschema import Draft202012Validator, RefResolver

import campaign
from harness import CONFIG, SiteTest, wait_until

ROUTER = pathlib.Path(__file__).resolve().parents[2] / "daemon" / "http" / "router.cpp"
OPERATOR, READER = "o" * 30, "r" * 30
# wheat-high has a classical chart with everything that can be chosen; moisture a relation that is to hold.
CLASSICAL = ("    charts: {method: classical, baseline: 20, ewma: {weight: 0.2, width: 2.86}, cusum: {allowance: 0.5, limit: 5}, "
             "run_rules: [{same_side: 9}, {trend: 6}]}\n")


def parts(node):
    """Every object within a JSON value."""
    if isinstance(node, dict):
        yield node
        node = list(node.values())
    if isinstance(node, list):
        for inner in node:
            yield from parts(inner)


class Document:
    def __init__(self, text):
        self.json = json.loads(text)
        self.operations = {(method.upper(), path): operation for path, item in self.json["paths"].items()
                           for method, operation in item.items() if method != "parameters"}
        # A document for clients lets fields be added; here one that is not described is a fault.
        self.strict = copy.deepcopy(self.json)
        for part in parts(self.strict):
            if "properties" in part and isinstance(part.get("required"), list):
                part["additionalProperties"] = False
        self.resolver = RefResolver.from_schema(self.strict)

    def resolved(self, node):
        while "$ref" in node:
            node = self.resolver.resolve(node["$ref"])[1]
        return node

    def answer(self, method, path, status):
        """((method, path, key), answer) for a status; a method that the path does not know is answered as one that it does."""
        if (method, path) not in self.operations:
            method = next(m for m, p in self.operations if p == path)
        answers = self.operations[method, path]["responses"]
        key = str(status) if str(status) in answers else "default"
        return (method, path, key), self.resolved(answers[key])

    def faults(self, schema, value):
        validator = Draft202012Validator(schema, resolver=self.resolver)
        return [f"{'/'.join(map(str, e.absolute_path))}: {e.message[:300]}" for e in validator.iter_errors(value)]


class OpenApi(SiteTest):
    def rich_site(self):
        self.receiver = self.make_receiver()
        routes = (f"    - {{name: engineer, url: 'http://127.0.0.1:{self.receiver.port}/hook', secret_file: secret}}\n"
                  "    - {name: nobody, url: 'http://127.0.0.1:9/', secret_file: secret, kinds: [file_rejected]}")
        config = CONFIG.format(port=0, rescan="1s", decimals=3, routes=routes)
        config = config.replace("  wheat-high:\n", "  wheat-high:\n" + CLASSICAL)
        config = config.replace("comparisons:\n", "comparisons:\n  held: {measurand: protein, x: line1, y: line2, every: 2h, "
                                "relation: {intercept: 0.0, slope: 1.0}, prove_within: 1d, fit: weighted_deming}\n")
        site = self.make_site(config=config + "access: {tokens_file: tokens}\n")
        (site.folder / "tokens").write_text("".join(f"{role} {role} {hashlib.sha256(token.encode()).hexdigest()}\n"
                                                    for role, token in (("operator", OPERATOR), ("reader", READER))))
        return site.start()

    def ask(self, method, path, query="", token=None, body=None, headers=None, **names):
        """(status, answer); the answer is held against the description."""
        url = re.sub(r"\{(\w+)\}", lambda m: names[m[1]], path) + query
        headers = {**({"Authorization": f"Bearer {token}"} if token else {}), **(headers or {})}
        status, got, answer = self.site.request(url, method, body, headers)
        key, described = self.document.answer(method, path, status)
        self.seen.add(key)
        where = f"{method} {url}: {status}"
        if status == 304:
            self.assertEqual(answer, b"")
            return status, None
        media = {name.split(";")[0]: content for name, content in described["content"].items()}
        type_ = got["Content-Type"].split(";")[0]
        self.assertIn(type_, media, where)
        for name, header in described.get("headers", {}).items():
            self.assertTrue(name in got or name == "Link", f"{where} has no {name}; {header}")
        if not type_.endswith("json"):
            return status, answer
        value = json.loads(answer)
        self.assertEqual(self.document.faults(media[type_]["schema"], value)[:3], [], where)
        if status < 300:
            self.assertEqual(200 <= status, type_ == "application/json")
        return status, value

    def expect(self, status, *args, **kwargs):
        found, value = self.ask(*args, **kwargs)
        self.assertEqual(found, status, (args, value))
        return value

    def test_every_answer_is_as_described_and_every_description_is_answered(self):
        self.site = self.rich_site()
        self.document = Document(self.site.request("/api/openapi.json")[2])
        self.seen = set()
        self.check_document()
        self.check_views()  # while nothing has come
        for analyzer, name, text in campaign.files():
            self.site.drop(analyzer, name, text)
        self.site.wait_taken()
        wait_until(lambda: len(self.receiver.events()) >= 3, "messages arrive")
        self.check_views()
        self.check_rich()
        self.check_lists()
        self.check_changes()
        self.check_trouble()
        described = {(method, path, key) for (method, path), o in self.document.operations.items() for key in o["responses"]}
        # Reading needs a token on an open address only: the router's own test asks there.
        unseen = {s for s in described - self.seen if s[2] != "default" and s[:1] + s[2:] != ("GET", "401")}
        self.assertEqual(unseen, set())

    def check_document(self):
        document = self.document.json
        self.assertEqual(document["openapi"], "3.1.0")
        self.assertEqual(document["info"]["version"], self.site.get("/api/status")["service"]["version"])
        routes = re.findall(r'\{"(GET|POST)", "(/[^"]*)", &Api::', ROUTER.read_text())
        self.assertGreater(len(routes), 10)
        self.assertEqual(sorted((m, re.sub(r"\{\w+\}", "*", p)) for m, p in self.document.operations), sorted(routes))
        for schema in document["components"]["schemas"].values():
            Draft202012Validator.check_schema(schema)
        used = {part["$ref"] for part in parts(document) if "$ref" in part}
        kept = {f"#/components/{kind}/{name}" for kind in ("schemas", "responses", "headers") for name in document["components"][kind]}
        self.assertEqual(used, kept, "what is used is there, what is there is used")
        ids = [o["operationId"] for o in self.document.operations.values()]
        self.assertEqual(len(ids), len(set(ids)))
        for (method, path), operation in self.document.operations.items():
            given = operation.get("parameters", []) + document["paths"][path].get("parameters", [])
            self.assertEqual([p["name"] for p in given if p["in"] == "path"], re.findall(r"\{(\w+)\}", path), path)
            for answer in operation["responses"].values():
                self.assertTrue(self.document.resolved(answer)["description"])
            self.assertEqual(operation.get("security", document["security"]),
                             [{"token": []}] if method == "POST" else [] if path.startswith("/health") else [{}, {"token": []}])

    def check_views(self):
        for path in ("/api/status", "/api/charts", "/api/comparisons", "/api/alerts", "/api/files", "/api/readings", "/api/openapi.json",
                     "/metrics", "/health/live", "/health/ready"):
            self.expect(200, "GET", path)
        for chart in self.site.get("/api/charts")["charts"]:
            self.expect(200, "GET", "/api/charts/{analyzer}/{standard}/{measurand}", "?points=500",
                        **{k: chart[k] for k in ("analyzer", "standard", "measurand")})
        for comparison in self.site.get("/api/comparisons")["comparisons"]:
            self.expect(200, "GET", "/api/comparisons/{id}", "?pairs=500", id=comparison["id"])

    def check_rich(self):
        """That what was held against the description had something to say."""
        charts, comparisons = self.site.get("/api/charts")["charts"], self.site.get("/api/comparisons")["comparisons"]
        self.assertEqual({c["method"] for c in charts}, {"change_point", "classical"})
        self.assertTrue({"stable", "unstable"} <= {c["state"] for c in charts} | {"learning"}, [c["state"] for c in charts])
        self.assertTrue(any(c["change"] and c["change"]["started_between"] for c in charts))
        self.assertTrue(any(c["intervention_effect"] for c in charts) and any(c["since_first"] for c in charts))
        self.assertTrue(all(c["fit"] and c["difference"] and c["robust"] and c["scatter"] for c in comparisons))
        self.assertTrue(any(c["diagnosis"] and c["look_back"] for c in comparisons))
        self.assertTrue(any(c["relation"] for c in comparisons))

    def check_lists(self):
        for path, key, queries in (
                ("/api/alerts", "alerts", ("?limit=2", "?state=resolved", "?state=open,acknowledged&since=2026-01-01T00:00:00Z")),
                ("/api/files", "files", ("?limit=2", "?outcome=rejected", "?outcome=repeated&analyzer=line1")),
                ("/api/readings", "readings", ("?limit=5000", "?kind=check&standard=wheat-low", "?sample=C-00003&from=2026-01-01T00:00:00Z"))):
            for query in queries:
                rows = self.expect(200, "GET", path, query)
                self.assertTrue(rows[key], path + query)
            self.expect(400, "GET", path, "?limit=0")
        self.expect(200, "GET", "/api/readings", "?limit=3", headers={"Accept": "text/csv"})
        for path in ("/api/charts", "/api/charts/{analyzer}/{standard}/{measurand}"):
            self.expect(400, "GET", path, "?points=x", analyzer="a", standard="b", measurand="c")
        self.expect(400, "GET", "/api/comparisons", "?pairs=501")
        self.expect(400, "GET", "/api/comparisons/{id}", "?pairs=501", id="protein")
        self.expect(404, "GET", "/api/charts/{analyzer}/{standard}/{measurand}", analyzer="a", standard="b", measurand="c")
        self.expect(404, "GET", "/api/comparisons/{id}", id="none")
        self.expect(404, "GET", "/api/alerts/{id}", id="999999")
        self.expect(200, "GET", "/api/alerts/{id}", id=self.site.get("/api/alerts?limit=1")["alerts"][0]["id"])
        for method, path in self.document.operations:
            if method == "GET":
                names = {"analyzer": "line1", "standard": "wheat-low", "measurand": "protein", "id": "protein" if "comp" in path else "1"}
                self.expect(304, "GET", path, headers={"If-None-Match": "*"}, **names)
                self.expect(405, "DELETE", path, **names)

    def check_changes(self):
        [alert, *_] = self.site.get("/api/alerts?state=open")["alerts"]
        gone = self.site.get("/api/alerts?state=resolved&limit=1")["alerts"][0]
        wish = json.dumps({"analyzer": "line1", "kind": "noted", "by": "K. Byrne", "note": "seen", "at": "2026-01-20T06:00:00Z"})
        posts = (("/api/alerts/{id}/acknowledge", alert["id"], json.dumps({"by": "K. Byrne", "note": "seen"}), 200),
                 ("/api/interventions", "", wish, 201),
                 ("/api/messages/{id}/resend", self.receiver.events()[0]["id"], "", 202))
        for path, id_, body, done in posts:
            self.expect(401, "POST", path, body=body, id=id_)
            self.expect(403, "POST", path, body=body, token=READER, id=id_)
            self.expect(405, "PUT", path, body=body, token=OPERATOR, id=id_)
            self.expect(done, "POST", path, body=body, token=OPERATOR, id=id_)
            if body:
                self.expect(400, "POST", path, body="{", token=OPERATOR, id=id_)
                self.expect(413, "POST", path, body="x" * 20_000, token=OPERATOR, id=id_)
        self.assertEqual(self.site.get(f"/api/alerts/{alert['id']}")["state"], "acknowledged")
        self.expect(404, "POST", "/api/alerts/{id}/acknowledge", body='{"by":"a"}', token=OPERATOR, id="999999")
        self.expect(409, "POST", "/api/alerts/{id}/acknowledge", body='{"by":"a"}', token=OPERATOR, id=gone["id"])
        self.expect(200, "POST", "/api/interventions", body=wish, token=OPERATOR)
        self.expect(409, "POST", "/api/interventions", body=wish.replace("seen", "heard"), token=OPERATOR)
        self.expect(422, "POST", "/api/interventions", body=wish.replace("line1", "line3"), token=OPERATOR)
        self.expect(404, "POST", "/api/messages/{id}/resend", token=OPERATOR, id="msg_0")
        waiting = wait_until(lambda: [d for a in self.site.get("/api/alerts?limit=500")["alerts"] for d in a["deliveries"]
                                      if d["route"] == "nobody" and d["state"] == "waiting" and d["tries"]], "a message waits")
        self.expect(409, "POST", "/api/messages/{id}/resend", token=OPERATOR, id=waiting[0]["message"])

    def check_trouble(self):
        """Another process holds the journal: nothing can be stored, and everything says so."""
        journal = sqlite3.connect(self.site.folder / "state" / "journal.sqlite", isolation_level=None, timeout=30)
        journal.execute("BEGIN IMMEDIATE")
        try:
            wait_until(lambda: self.site.status_code("/health/ready") == 503 or self.site.drop("line1", "late.csv", "nonsense\n"),
                       "the service is not ready")
            self.expect(503, "GET", "/health/ready")
            self.expect(200, "GET", "/metrics")
            alert = self.site.get("/api/alerts?state=open&limit=1")["alerts"][0]["id"]
            self.expect(503, "POST", "/api/alerts/{id}/acknowledge", body='{"by":"a"}', token=OPERATOR, id=alert)
            self.expect(503, "POST", "/api/messages/{id}/resend", token=OPERATOR, id=self.receiver.events()[0]["id"])
            self.expect(503, "POST", "/api/interventions", token=OPERATOR,
                        body='{"analyzer":"line1","kind":"noted","by":"a","at":"2026-01-21T06:00:00Z"}')
        finally:
            journal.execute("ROLLBACK")
            journal.close()
