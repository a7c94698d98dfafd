"""What a run came to, in a form in which two runs can be compared: all that is derived from the files, and nothing of
the clock on the wall."""
import sqlite3

MOMENTS = ("opened_at", "changed_at", "told_at", "resolved_at", "url", "config_sha256")  # each site has ports of its own


def told(alert):
    """An alert without the times at which things were told."""
    kept = {key: value for key, value in alert.items() if key not in MOMENTS}
    kept["acknowledged"] = alert["acknowledged"] and alert["acknowledged"]["by"]
    kept["history"] = [(step["change"], step["state"], step["title"]) for step in alert["history"]]
    kept["deliveries"] = [(d["route"], d["type"], d["state"]) for d in alert["deliveries"]]
    return kept


def derived(site):
    """Charts, comparisons and counts."""
    charts = [site.get(f"/api/charts/{chart['analyzer']}/{chart['standard']}/{chart['measurand']}?points=500")
              for chart in site.get("/api/charts")["charts"]]
    comparisons = [site.get(f"/api/comparisons/{c['id']}?pairs=500") for c in site.get("/api/comparisons")["comparisons"]]
    intake = site.get("/api/status")["intake"]
    return {"charts": charts, "comparisons": comparisons, "readings": intake["readings"], "files": intake["files"]}


def outcome(site):
    """`derived`, and every alert ever, with its history and what was told of it."""
    alerts = site.get("/api/alerts?state=open,acknowledged,resolved&limit=500")["alerts"]
    return {**derived(site), "alerts": sorted((told(a) for a in alerts), key=lambda a: int(a["id"]))}


def differences(expected, found, path=""):
    """Where two outcomes differ, at most a few places, one a line; empty if nowhere. (unittest's own comparison of such large
    values takes minutes.)"""
    if type(expected) is type(found) and isinstance(expected, dict):
        pairs = [(f"{path}.{key}", expected.get(key), found.get(key)) for key in sorted({*expected, *found})]
    elif isinstance(expected, (list, tuple)) and isinstance(found, (list, tuple)) and len(expected) == len(found):
        pairs = [(f"{path}[{i}]", e, f) for i, (e, f) in enumerate(zip(expected, found))]
    elif expected == found:
        return ""
    else:
        return f"{path}: expected {str(expected)[:200]}, found {str(found)[:200]}\n"
    lines = ""
    for place, e, f in pairs:
        if e != f:
            lines += differences(e, f, place)
        if lines.count("\n") > 5:
            break
    return lines


def check_same(test, expected, found, when=""):
    lines = differences(expected, found)
    if lines:
        test.fail(f"another outcome{when and ' ' + when}:\n{lines}")


def moved_files(site):
    """Where each file lies now; the day of done/ is left out."""
    return {(analyzer, sub): site.files_in(analyzer, sub) for analyzer in ("line1", "line2") for sub in ("done", "rejected")}


def journal_rows(site, sql):
    database = sqlite3.connect(f"file:{site.folder}/state/journal.sqlite?mode=ro", uri=True)
    try:
        return database.execute(sql).fetchall()
    finally:
        database.close()


def check_deliveries(test, site, receiver):
    """Every message of the journal arrived, under its one id and with its one body, and nothing else did."""
    bodies = {}
    for got in receiver.got:
        test.assertTrue(got["signed"])
        test.assertEqual(bodies.setdefault(got["headers"]["webhook-id"], got["body"]), got["body"], "one id, one body")
    stored = dict(journal_rows(site, "SELECT webhook_id, body FROM messages"))
    test.assertEqual({i: b.decode() for i, b in bodies.items()}, stored)


def all_delivered(site):
    return not journal_rows(site, "SELECT 1 FROM outbox WHERE state <> 'delivered' LIMIT 1")
