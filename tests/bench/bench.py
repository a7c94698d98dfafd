"""The figures of the service beside their references, measured in one run on one machine.

bench.py [part ...]   parts: intake start pairs webhook status writer idle backlog large many (default: all)
"""
import ctypes
import json
import os
import pathlib
import select
import statistics
import struct
import subprocess
import sys
import tempfile
import time
import urllib.request

ROOT = pathlib.Path(__file__).resolve().parents[2]
sys.path[:0] = [str(ROOT / "tests" / "e2e"), str(ROOT / "examples")]
os.environ.setdefault("AGREED", str(ROOT / "build" / "agreed"))
from harness import Site, wait_until  # noqa: E402
from plant import START, rfc3339  # noqa: E402

STANDARDS = ("wheat-low", "wheat-mid", "wheat-high", "wheat-rye")
LARGE = """\
site: Harrow Mill
state: state
listen: {address: 127.0.0.1, port: 0}
analyzers: {line1: {inbox: drop/line1, settle: 200ms}, line2: {inbox: drop/line2, settle: 200ms}}
measurands: {protein: {unit: g/100 g, decimals: 4, decision_levels: [10.5, 13.0], allowable_difference: {absolute: 0.2}}}
check_standards:
""" + "".join(f"  {s}: {{measurands: {{protein: {{}}}}}}\n" for s in STANDARDS) + """\
comparisons: {protein: {measurand: protein, x: line1, y: line2}}
"""


def say(text):
    print(text, flush=True)


def write_large(folder, rows_each):
    """One file an analyzer: every second row a check of one of four standards, every other a split sample."""
    import random
    rng = random.Random(9)
    paths = []
    truths = [rng.uniform(10.0, 13.6) for _ in range(rows_each // 2)]
    for n, analyzer in enumerate(("line1", "line2")):
        path = folder / f"{analyzer}.csv"
        with open(path, "w") as out:
            out.write("analyzer,kind,measured_at,measurand,item,value\n")
            for i in range(rows_each // 2):
                at = rfc3339(START - 400 * 86400 + 120 * i + n)
                out.write(f"{analyzer},check,{at},protein,{STANDARDS[i % 4]},{10.62 + i % 4 + rng.gauss(0, 0.02):.4f}\n")
                out.write(f"{analyzer},split,{at},protein,S-{i:07d},{truths[i] + rng.gauss(0, 0.02):.4f}\n")
        paths.append(path)
    return paths


def take_in(site, paths, rows):
    """Seconds from the files' arrival until the last row is committed."""
    begun = time.monotonic()
    for path, analyzer in zip(paths, ("line1", "line2")):
        os.rename(path, site.inbox(analyzer) / path.name)
    while site.get("/api/status")["intake"]["readings"]["accepted"] < rows:
        time.sleep(0.05)
        if site.process.poll() is not None:
            raise SystemExit("the service ended")
    return time.monotonic() - begun


def resident_mb(site):
    for line in open(f"/proc/{site.process.pid}/status"):
        if line.startswith("VmRSS"):
            return int(line.split()[1]) / 1024
    return 0.0


def import_seconds(paths):
    """The sqlite3 shell importing the same files into one table with the same five-column key."""
    with tempfile.TemporaryDirectory(dir=paths[0].parent) as folder:
        create = ("create table r(analyzer text, kind text, measured_at text, measurand text, item text, value real, "
                  "primary key(analyzer, kind, measurand, item, measured_at));")
        begun = time.monotonic()
        subprocess.run(["sqlite3", f"{folder}/db", create, *(f".import --csv --skip 1 {p} r" for p in paths)], check=True)
        return time.monotonic() - begun


def bench_intake(rows=1_000_000):
    site = Site(config=LARGE).start()
    try:
        paths = write_large(site.folder, rows // 2)
        reference = import_seconds(paths)
        seconds = take_in(site, paths, rows)
        say(f"intake, {rows:,} rows: {rows / seconds:,.0f} rows/s; sqlite3 .import {rows / reference:,.0f} rows/s; "
            f"ratio {reference / seconds:.2f} (budget 0.35, aim 0.6)")
        say(f"resident memory after {rows:,} rows: {resident_mb(site):.1f} MB (budget 64)")
        measure_start(site, rows)
    finally:
        site.close()


def measure_start(site, rows):
    site.stop()
    begun = time.monotonic()
    site.start()
    say(f"start with {rows:,} readings: {time.monotonic() - begun:.2f} s to ready "
        f"(budget {'0.7' if rows <= 100_000 else '6'} s); resident {resident_mb(site):.1f} MB")


def bench_start():
    site = Site(config=LARGE).start()
    try:
        take_in(site, write_large(site.folder, 50_000), 100_000)
        measure_start(site, 100_000)
    finally:
        site.close()


def bench_pairs():
    say(subprocess.run([str(ROOT / "build/tests/bench/bench_pairs")], capture_output=True, text=True, check=True).stdout.strip())
    import numpy as np
    from scipy import odr
    rng = np.random.default_rng(1)
    truth = rng.uniform(10, 13.6, 100)
    x, y = truth + rng.normal(0, 0.02, 100), truth + rng.normal(0, 0.02, 100)

    def deming():
        mx, my = x.mean(), y.mean()
        sxx, syy, sxy = ((x - mx) ** 2).sum(), ((y - my) ** 2).sum(), ((x - mx) * (y - my)).sum()
        d = syy - sxx
        slope = (d + np.sqrt(d * d + 4 * sxy * sxy)) / (2 * sxy)
        return slope, my - slope * mx

    def each(function, count):
        begun = time.perf_counter()
        for _ in range(count):
            function()
        return (time.perf_counter() - begun) / count * 1e6

    say(f"reference: numpy refit of 100: {each(deming, 5000):.1f} us; "
        f"scipy.odr: {each(lambda: odr.ODR(odr.RealData(x, y, 0.02, 0.02), odr.unilinear, beta0=[1, 0]).run(), 200):.0f} us")


# Between two drops the machine rests as it does in a plant, and so it must between two measurements of a floor: a
# processor that slept, and a disk that had nothing to do, take longer than in a loop.
REST = 0.02


def fsync_us(folder, count=200):
    times = []
    with open(folder / "fsync", "wb") as file:
        for _ in range(count):
            time.sleep(REST)
            begun = time.perf_counter()
            file.write(b"x" * 4096)
            file.flush()
            os.fdatasync(file.fileno())
            times.append((time.perf_counter() - begun) * 1e6)
    return statistics.median(times)


def inotify_us(folder, count=200):
    """From the rename on until a process that waits for it runs."""
    libc = ctypes.CDLL(None, use_errno=True)
    fd = libc.inotify_init()
    libc.inotify_add_watch(fd, str(folder).encode(), 0x80)  # IN_MOVED_TO
    ours, theirs = os.pipe()
    child = os.fork()
    if child == 0:
        for _ in range(count):
            os.read(fd, 4096)
            os.write(theirs, struct.pack("d", time.monotonic()))
        os._exit(0)
    times = []
    for _ in range(count):
        (folder.parent / "seed").write_text("x")
        time.sleep(REST)
        begun = time.monotonic()
        os.rename(folder.parent / "seed", folder / "woken")
        times.append((struct.unpack("d", os.read(ours, 8))[0] - begun) * 1e6)
    os.waitpid(child, 0)
    for each in (fd, ours, theirs):
        os.close(each)
    return statistics.median(times)


class LightReceiver:
    """A webhook endpoint in a process of its own, which tells when each message's body was there."""

    def __init__(self, port=17482):
        self.url = f"http://127.0.0.1:{port}/"
        self.process = subprocess.Popen([str(ROOT / "build/tests/bench/bench_receiver"), str(port)], bufsize=0,
                                        stdin=subprocess.PIPE, stdout=subprocess.PIPE)
        assert self.process.stdout.readline() == b"ready\n"

    def first_after(self, begun, patience=5):
        """When the first message after that came, both in seconds of the steady clock; waits for it."""
        while select.select([self.process.stdout], [], [], patience)[0]:
            arrived = int(self.process.stdout.readline()) / 1e9
            if arrived > begun:
                return arrived
        return begun + patience

    def close(self):
        self.process.stdin.close()
        self.process.wait()


def bench_webhook(drops=200):
    receiver = LightReceiver()
    standards = [f"std-{i:03d}" for i in range(drops)]
    config = f"""\
site: Harrow Mill
state: state
false_alerts_per_year: 6
listen: {{address: 127.0.0.1, port: 0}}
analyzers: {{line1: {{inbox: drop/line1}}, line2: {{inbox: drop/line2}}}}
measurands: {{protein: {{unit: g/100 g, decimals: 4}}}}
check_standards:
{''.join(f'  {s}: {{analyzers: [line1], measurands: {{protein: {{}}}}}}' + chr(10) for s in standards)}
alerts: {{routes: [{{name: a, url: "{receiver.url}", secret_file: secret}}]}}
"""
    site = Site(config=config).start()
    try:
        import random
        rng = random.Random(3)
        lines = ["kind,measured_at,measurand,item,value"]
        lines += [f"check,{rfc3339(START + i * 3600)},protein,{s},{10 + rng.gauss(0, 0.02):.4f}" for i in range(40) for s in standards]
        site.drop("line1", "history.csv", "\n".join(lines) + "\n")
        site.wait_taken()
        time.sleep(1)
        times = []
        for i, standard in enumerate(standards):
            ready = site.folder / "ready"
            ready.write_text(f"kind,measured_at,measurand,item,value\ncheck,{rfc3339(START + 50 * 3600)},protein,{standard},12\n")
            time.sleep(REST)
            begun = time.monotonic()
            os.rename(ready, site.inbox("line1") / f"d{i}.csv")
            times.append((receiver.first_after(begun) - begun) * 1e6)
        times.sort()
        floors = fsync_us(site.folder), inotify_us(site.inbox("line2"))
        median, p99 = statistics.median(times), times[int(len(times) * 0.99)]
        say(f"drop to webhook: median {median:.0f} us, 99th percentile {p99:.0f} us; one fsync {floors[0]:.0f} us + one inotify "
            f"wake-up {floors[1]:.0f} us; ratios {median / sum(floors):.1f} (budget 3) and {p99 / sum(floors):.1f} (budget 10)")
    finally:
        site.close()
        receiver.close()


def wrk(url):
    out = subprocess.run(["wrk", "-t1", "-c16", "-d4s", url], capture_output=True, text=True, check=True).stdout
    return float(out.split("Requests/sec:")[1].split()[0])


class BareServer:
    """The same HTTP library answering with a constant of so many bytes."""

    def __init__(self, size, port=17481):
        self.url = f"http://127.0.0.1:{port}/"
        self.process = subprocess.Popen([str(ROOT / "build/tests/bench/bench_bare_server"), str(port), str(size)], stdin=subprocess.PIPE)
        wait_until(self.answers, "the bare server answers")

    def answers(self):
        try:
            return urllib.request.urlopen(self.url, timeout=5).status == 200
        except OSError:
            return False

    def close(self):
        self.process.stdin.close()
        self.process.wait()


def bench_status(rounds=3):
    """Ours and the bare server in turn, so that a busy moment hits both."""
    site = Site().start()
    try:
        body = site.request("/api/status")[2]
        bare = BareServer(len(body))
        pairs = [(wrk(site.base + "/api/status"), wrk(bare.url)) for _ in range(rounds)]
        bare.close()
        ours, theirs = (statistics.median(side) for side in zip(*pairs))
        ratio = statistics.median(a / b for a, b in pairs)
        say(f"/api/status ({len(body)} bytes), 16 connections: {ours:,.0f} requests/s; bare server {theirs:,.0f}; "
            f"ratio {ratio:.2f} (budget 0.7)")
    finally:
        site.close()


def intake_beside(rows, url=None):
    """Seconds for `rows` on a fresh site, while 16 connections ask `url` ("": the site's own status) all the time."""
    site = Site(config=LARGE).start()
    load = None
    try:
        paths = write_large(site.folder, rows // 2)
        if url is not None:
            load = subprocess.Popen(["wrk", "-t1", "-c16", "-d600s", url or site.base + "/api/status"], stdout=subprocess.DEVNULL)
            time.sleep(0.5)
        return take_in(site, paths, rows)
    finally:
        if load:
            load.terminate()
            load.wait()
        site.close()


def bench_writer(rows=100_000, rounds=3):
    """What readers cost the writer. The reference has the same load beside it, on the bare server: what the processors
    are busy with is the same, so the difference is what readers and writer have in common."""
    bare = BareServer(1200)
    try:
        alone = statistics.median(intake_beside(rows) for _ in range(rounds))
        pairs = [(intake_beside(rows, bare.url), intake_beside(rows, "")) for _ in range(rounds)]
        beside, asked = (statistics.median(side) for side in zip(*pairs))
        slower = statistics.median(b / a for a, b in pairs) - 1
        say(f"{rows:,} rows taken in: alone {alone:.2f} s; while 16 connections ask a bare server beside it {beside:.2f} s; while they "
            f"ask /api/status {asked:.2f} s: slower by {100 * slower:.1f} % (budget 5)")
    finally:
        bare.close()


def by_thread(site, file, value):
    """A figure of each of the service's threads, by thread id."""
    found = {}
    for thread in pathlib.Path(f"/proc/{site.process.pid}/task").iterdir():
        found[thread.name] = value((thread / file).read_text())
    return found


def bench_idle(seconds=45):
    """No client: processor time from the scheduler's nanoseconds; wake-ups are the times that a thread went to sleep."""
    site = Site(rescan="15s").start()
    try:
        time.sleep(5)
        spent = lambda: sum(by_thread(site, "schedstat", lambda text: int(text.split()[0])).values())
        slept = lambda: by_thread(site, "status", lambda text: int(text.split("\nvoluntary_ctxt_switches:")[1].split()[0]))
        before, asleep = spent(), slept()
        time.sleep(seconds)
        share = (spent() - before) / 1e9 / seconds * 100
        woken = {thread: count - asleep.get(thread, 0) for thread, count in slept().items()}
        most = max(woken.values())
        say(f"idle: {share:.4f} % of one core (budget 0.5); {sum(woken.values())} wake-ups of {len(woken)} threads in {seconds} s with "
            f"{seconds // 15} rescans of 2 folders, {sum(1 for n in woken.values() if n)} threads woke at all, the busiest {most} times; "
            f"resident {resident_mb(site):.1f} MB")
    finally:
        site.close()


def latencies_ms(addresses, while_true, at_least=0):
    """How long a GET of each address takes, asked in turn on a connection of its own, as pages do: 50 times a second each."""
    times = [[] for _ in addresses]
    while while_true() or len(times[0]) < at_least:
        for address, its in zip(addresses, times):
            begun = time.monotonic()
            urllib.request.urlopen(address, timeout=30).read()
            its.append((time.monotonic() - begun) * 1e3)
            time.sleep(max(0.0, 0.01 - its[-1] / 1e3))
    return times


def percentile(values, share):
    return sorted(values)[min(len(values) - 1, int(share * len(values)))]


def bench_backlog(files=100_000):
    """So many files waiting at the start, one row each: how fast they go, and what a reader notices of it. The reference is
    a bare server asked in the same moments: what the kernel's work on so many files costs any answer of this machine."""
    site = Site(config=LARGE).start()
    bare = BareServer(1200)
    try:
        idle = latencies_ms((site.base + "/api/status", bare.url), lambda: False, at_least=1000)
        site.stop()
        for i in range(files):
            (site.inbox("line1") / f"{i:06d}.csv").write_text(
                f"kind,measured_at,measurand,item,value\ncheck,{rfc3339(START - 400 * 86400 + 60 * i)},protein,wheat-low,{10.6 + i % 7 / 100:.2f}\n")
        site.start(wait_ready=False)
        begun = time.monotonic()
        taken = lambda: site.get("/api/status")["intake"]["readings"]["accepted"]
        busy = latencies_ms((site.base + "/api/status", bare.url), lambda: taken() < files)
        seconds = time.monotonic() - begun
        ours, theirs = ((percentile(at_rest, 0.99), percentile(at_work, 0.99)) for at_rest, at_work in zip(idle, busy))
        say(f"{files:,} waiting files: {files / seconds:,.0f} files/s; GET /api/status meanwhile: median {statistics.median(busy[0]):.1f} ms, "
            f"99th percentile {ours[1]:.1f} ms; idle: {statistics.median(idle[0]):.1f} and {ours[0]:.1f} ms; ratio of the 99th percentiles "
            f"{ours[1] / ours[0]:.1f} (budget 2); a bare server asked in turn with it: {theirs[1]:.1f} and idle {theirs[0]:.1f} ms, ratio "
            f"{theirs[1] / theirs[0]:.1f}; resident {resident_mb(site):.1f} MB")
    finally:
        site.close()
        bare.close()


def bench_large(megabytes=200):
    """One large file, rows of about 200 bytes."""
    site = Site(config=LARGE).start()
    try:
        path = site.folder / "large.csv"
        rows = megabytes * 5_000
        with open(path, "w") as out:
            out.write("kind,measured_at,measurand,item,value,note\n")
            for i in range(rows):
                out.write(f"check,{rfc3339(START - 400 * 86400 + 30 * i)},protein,{STANDARDS[i % 4]},{10.62 + i % 4 + i % 11 / 100:.2f},{i:0130d}\n")
        size = path.stat().st_size / 1e6
        seconds = take_in(site, [path], rows)
        peak = next(int(l.split()[1]) / 1024 for l in open(f"/proc/{site.process.pid}/status") if l.startswith("VmHWM"))
        say(f"a file of {size:.0f} MB, {rows:,} rows: {seconds:.1f} s, {size / seconds:.1f} MB/s; "
            f"resident at most {peak:.1f} MB (budget 64)")
    finally:
        site.close()


def many_config(analyzers, measurands):
    lines = ["site: Harrow Mill", "state: state", "listen: {address: 127.0.0.1, port: 0}", "analyzers:"]
    lines += [f"  a{i}: {{inbox: drop/a{i}, settle: 200ms}}" for i in range(analyzers)]
    lines += ["measurands:"]
    lines += [f"  m{i}: {{unit: g/100 g, decision_levels: [10.5, 13.0], allowable_difference: {{absolute: 0.2}}}}" for i in range(measurands)]
    lines += ["check_standards:", "  wheat-low: {measurands: {" + ", ".join(f"m{i}: {{}}" for i in range(measurands)) + "}}", "comparisons:"]
    lines += [f"  c{i}: {{measurand: m{i % measurands}, x: a{2 * i}, y: a{2 * i + 1}}}" for i in range(analyzers // 2)]
    return "\n".join(lines) + "\n"


def bench_many(seconds=60, analyzers=100, measurands=20, rate=5_000, rows=100):
    """A hundred analyzers at so many readings a second in files of a hundred rows: does the queue grow? The reference
    is the rate that was offered."""
    import random
    rng = random.Random(11)
    site = Site(config=many_config(analyzers, measurands))
    for i in range(analyzers):
        (site.folder / "drop" / f"a{i}").mkdir()
    site.start()
    try:
        begun, sent, pending, late = time.monotonic(), 0, [], 0.0
        while time.monotonic() - begun < seconds:
            analyzer = (sent // rows) % analyzers
            turn = sent // rows // analyzers
            at = START - 100 * 86400 + 60 * turn
            text = ["kind,measured_at,measurand,item,value"]
            for i in range(rows):
                m = i % measurands
                if i < 2 * measurands:
                    text.append(f"check,{rfc3339(at + i // measurands)},m{m},wheat-low,{10.62 + rng.gauss(0, 0.02):.4f}")
                else:  # the same samples on both analyzers of a pair
                    text.append(f"split,{rfc3339(at + i)},m{m},S-{analyzer // 2}-{turn}-{i},{10 + i % 40 / 10 + rng.gauss(0, 0.02):.4f}")
            site.drop(f"a{analyzer}", f"{turn}.csv", "\n".join(text) + "\n")
            sent += rows
            if sent % (rate // 5) == 0:
                pending.append(site.get("/api/status")["intake"]["pending_files"])
            ahead = begun + sent / rate - time.monotonic()
            late = max(late, -ahead)
            time.sleep(max(0.0, ahead))
        offered = sent / (time.monotonic() - begun)
        behind = sent - site.get("/api/status")["intake"]["readings"]["accepted"]
        half = len(pending) // 2
        say(f"{analyzers} analyzers, {offered:,.0f} readings/s for {seconds} s in files of {rows} rows: waiting files, first half "
            f"at most {max(pending[:half])}, second half at most {max(pending[half:])}; behind at the end {behind:,} rows; "
            f"the writer was late by at most {late:.2f} s; resident {resident_mb(site):.1f} MB")
    finally:
        site.close()


if __name__ == "__main__":
    parts = sys.argv[1:] or ["pairs", "intake", "start", "webhook", "status", "writer", "idle", "backlog", "large", "many"]
    say(f"{time.strftime('%Y-%m-%d')}, {os.cpu_count()} cores, "
        + next(l.split(":")[1].strip() for l in open("/proc/cpuinfo") if l.startswith("model name")))
    for part in parts:
        globals()[f"bench_{part}"]()
