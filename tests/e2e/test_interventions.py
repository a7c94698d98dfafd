"""An intervention told over HTTP: as good as one from a file, and on record before it is answered."""
import hashlib
import json
import sqlite3
import subprocess

from harness import AGREED, SiteTest, wait_until
from outcome import check_same, derived, told
from plant import START, Plant, csv, rfc3339

OPERATOR, READER = "o" * 30, "r" * 30


class Interventions(SiteTest):
    def with_tokens(self, **options):
        site = self.make_site(**options)
        site.config.write_text(site.config.read_text() + "access: {tokens_file: tokens}\n")
        (site.folder / "tokens").write_text("".join(f"{role} {role} {hashlib.sha256(token.encode()).hexdigest()}\n"
                                                    for role, token in (("operator", OPERATOR), ("reader", READER))))
        return site.start()

    def tell(self, site, token=OPERATOR, body=None, **fields):
        """(status, answer)."""
        text = json.dumps(fields) if body is None else body
        headers = {"Authorization": f"Bearer {token}"} if token else {}
        status, headers, answer = site.request("/api/interventions", "POST", text, headers)
        self.assertEqual(headers["Content-Type"], "application/json" if status < 400 else "application/problem+json")
        return status, json.loads(answer)

    def stored(self, site):
        with sqlite3.connect(f"file:{site.folder}/state/journal.sqlite?mode=ro", uri=True) as journal:
            return journal.execute("SELECT analyzer, standard, measurand, kind, by, note, file FROM interventions ORDER BY id").fetchall()

    def test_it_has_the_effects_of_the_same_row_in_a_file(self):
        by_http, by_file = self.with_tokens(decimals=3), self.with_tokens(decimals=3)
        plant = Plant(seed=21, drift=lambda hours: 0.3 if hours > 20 * 24 else 0.0)
        checks, splits = plant.checks(0, 75), plant.splits(0, 300)
        for analyzer in checks:
            text = csv(sorted(checks[analyzer] + splits[analyzer], key=lambda r: r[1]))
            for site in (by_http, by_file):
                site.drop(analyzer, "history.csv", text)
        before = {}
        for site in (by_http, by_file):
            site.wait_taken()
            before[site] = derived(site)["charts"]
        # All of them lie in the past: what came after is folded again.
        done = [("recalibrated", START + 20 * 86400, "", ""), ("consumable_changed", START + 22 * 86400, "protein", ""),
                ("level_accepted", START + 23 * 86400, "protein", "wheat-low"), ("noted", START + 10 * 86400, "", "")]
        header = "kind,measured_at,measurand,item,value,standard,operator,note\n"
        by_file.drop("line2", "work.csv", header + "".join(
            f"intervention,{rfc3339(at)},{measurand},{kind},,{standard},K. Byrne,lamp\n" for kind, at, measurand, standard in done))
        by_file.wait_taken()
        for kind, at, measurand, standard in done:
            status, answer = self.tell(by_http, analyzer="line2", kind=kind, at=rfc3339(at), by="K. Byrne", note="lamp",
                                       measurand=measurand or None, standard=standard or None)
            self.assertEqual(status, 201, answer)
            self.assertEqual(answer, {"id": answer["id"], "analyzer": "line2", "standard": standard or None, "measurand": measurand or None,
                                      "kind": kind, "at": rfc3339(at), "by": "K. Byrne", "note": "lamp"})
            # Answered once it is folded: nothing need be waited for.
            marks = [m for c in by_http.get("/api/charts")["charts"] if c["analyzer"] == "line2" for m in c["marks"]]
            if kind in ("recalibrated", "consumable_changed"):
                self.assertIn(rfc3339(at), [m["at"] for m in marks])
        self.assertEqual([row[:6] for row in self.stored(by_http)], [row[:6] for row in self.stored(by_file)])
        self.assertEqual({row[6] for row in self.stored(by_http)}, {None})
        outcomes = [derived(site) for site in (by_http, by_file)]
        for of in outcomes:
            del of["files"]
        check_same(self, outcomes[1], outcomes[0])
        self.assertNotEqual(outcomes[0]["charts"], before[by_http], "the interventions changed the charts")
        now = [[told(a) for a in site.get("/api/alerts?state=open,acknowledged&limit=500")["alerts"]] for site in (by_http, by_file)]
        self.assertEqual({(a["kind"], str(a["subject"]), a["severity"]) for a in now[0]}, {(a["kind"], str(a["subject"]), a["severity"]) for a in now[1]})

    def test_answered_means_kept_once_and_proven(self):
        site = self.with_tokens()
        wish = {"analyzer": "line1", "kind": "repaired", "at": "2026-01-06T08:00:00+02:00", "by": "K. Byrne", "note": "new lamp, \"B\""}
        status, first = self.tell(site, **wish)
        self.assertEqual((status, first["at"]), (201, "2026-01-06T06:00:00.000Z"))
        site.kill()
        site.start()
        self.assertEqual(self.tell(site, **wish), (200, first))
        status, other = self.tell(site, **{**wish, "note": "another"})
        self.assertEqual(status, 409)
        self.assertIn("new lamp", other["detail"])
        site.drop("line1", "same.csv", "kind,measured_at,measurand,item,value,operator\nintervention,2026-01-06T06:00:00Z,,repaired,,X\n")
        site.wait_taken()
        self.assertEqual(self.stored(site), [("line1", "", "", "repaired", "K. Byrne", wish["note"], None)])
        head = site.get("/api/status")["chain"]
        verified = subprocess.run([AGREED, "verify", str(site.config), "--head", f"{head['sequence']}:{head['sha256']}"],
                                  capture_output=True, text=True, timeout=60, check=False)
        self.assertEqual(verified.returncode, 0, verified.stdout + verified.stderr)

    def test_what_a_file_may_not_say_is_refused_with_its_field(self):
        site = self.with_tokens()
        good = {"analyzer": "line1", "kind": "noted", "by": "K. Byrne", "note": ""}
        for changed, field, words in (
                ({"analyzer": "line11"}, "analyzer", 'did you mean "line1"'), ({"kind": "recalibrate"}, "kind", 'did you mean "recalibrated"'),
                ({"standard": "wheat-lo"}, "standard", 'did you mean "wheat-low"'), ({"measurand": "protien"}, "measurand", 'did you mean "protein"'),
                ({"at": "yesterday"}, "at", "2026-01-05T06:00:00Z"), ({"at": "2199-01-01T00:00:00Z"}, "at", "5 min in the future"),
                ({"at": "1999-12-31T00:00:00Z"}, "at", "not_before"), ({"by": "x" * 201}, "by", "at most 200"),
                ({"note": "two\nlines"}, "note", "control characters")):
            status, problem = self.tell(site, **{**good, **changed})
            self.assertEqual((status, problem["field"]), (422, field), problem)
            self.assertIn(words, problem["detail"])
        for body, field in (("{", None), ("[1]", None), ('{"analyzer":"line1"}', "kind"), (json.dumps({**good, "when": "now"}), "when"),
                            (json.dumps({**good, "note": 5}), "note"), ('{"by":"a","by":"b"}', "by")):
            status, problem = self.tell(site, body=body)
            self.assertEqual((status, problem.get("field")), (400, field), problem)
        self.assertEqual(self.tell(site, token=None, **good)[0], 401)
        self.assertEqual(self.tell(site, token=READER, **good)[0], 403)
        self.assertEqual(self.tell(site, **{**good, "note": "x" * 20_000})[0], 413)
        self.assertEqual(self.stored(site), [])
        self.assertEqual(self.tell(site, **good)[0], 201)

    def test_while_somebody_works_on_an_analyzer_its_alerts_wait(self):
        receiver = self.make_receiver()
        site = self.with_tokens(receiver_port=receiver.port)
        self.assertEqual(self.tell(site, analyzer="line1", kind="repaired", by="K. Byrne", note="lamp")[0], 201)
        for analyzer in ("line1", "line2"):
            site.drop(analyzer, "bad.csv", "nonsense\n")
            site.wait_taken()
        # One route keeps its order: what line1 had to tell would have come before.
        wait_until(lambda: receiver.events("file_rejected"), "line2's alert arrives")
        self.assertEqual([e["data"]["subject"] for e in receiver.events("file_rejected")], [{"analyzer": "line2"}])
        self.assertEqual(len(site.get("/api/alerts?state=open")["alerts"]), 2)
