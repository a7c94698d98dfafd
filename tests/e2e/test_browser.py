"""The page in a real browser: what is seen, reached by keyboard, renewed, and said when it is no longer current."""
import datetime
import hashlib
import random
import re
import unittest

from chromium import Browser
from harness import SiteTest, wait_until

SIZES = {"phone": (390, 844), "desk": (1280, 900), "wall": (1920, 1080)}
LONG = "Feuchtigkeitsgehaltsbestimmung Weizenvollkornmehl"

CONFIG = """\
site: Harrow Mill
state: state
listen: {{address: {address}, port: 0}}
access: {{tokens_file: tokens}}
analyzers:
  line1: {{title: "Nahinfrarotspektrometer der Abfuellanlage Sued", inbox: drop/line1, settle: 200ms, rescan: 1s}}
  line2: {{inbox: drop/line2, settle: 200ms, rescan: 1s}}
measurands:
  protein:
    title: {title}
    unit: g/100 g
    decimals: 2
    decision_levels: [10.5, 13.0]
    allowable_difference: {{absolute: 0.2}}
check_standards:
  wheat-low: {{lot: 2026-A, every: 8h, measurands: {{protein: {{reference: 10.62, expanded_uncertainty: 0.08}}}}}}
comparisons:
{comparisons}
alerts: {{routes: []}}
"""

# Text whose contrast to what is behind it is below 4.5:1. Relative luminance and contrast ratio as WCAG 2.1 (W3C, 5 June 2018)
# defines them; success criterion 1.4.3 asks 4.5:1 of text. What stands in a drawing is held against the sheet below it.
CONTRAST = """(() => {
  const parse = (c) => { const n = c.match(/[\\d.]+/g).map(Number); return n.length < 4 ? [...n, 1] : n; };
  const channel = (v) => { v /= 255; return v <= 0.03928 ? v / 12.92 : Math.pow((v + 0.055) / 1.055, 2.4); };
  const luminance = ([r, g, b]) => 0.2126 * channel(r) + 0.7152 * channel(g) + 0.0722 * channel(b);
  const over = (top, below) => [0, 1, 2].map((i) => top[i] * top[3] + below[i] * (1 - top[3])).concat(1);
  const behind = (e) => {
    const layers = [];
    for (; e; e = e.parentElement) {
      const colour = parse(getComputedStyle(e).backgroundColor);
      if (colour[3] > 0 && !(e instanceof SVGElement)) layers.push(colour);
      if (colour[3] === 1) break;
    }
    return layers.reduceRight((below, top) => over(top, below), [255, 255, 255, 1]);
  };
  const poor = []; let looked = 0;
  for (const e of document.querySelectorAll("body *")) {
    const own = Array.from(e.childNodes).filter((n) => n.nodeType === 3).map((n) => n.textContent.trim()).join("");
    if (!own || !e.checkVisibility() || e.closest("title, desc, .unseen")) continue;
    const style = getComputedStyle(e), back = behind(e);
    const fore = over(parse(e instanceof SVGElement ? style.fill : style.color), back);
    const [low, high] = [luminance(fore), luminance(back)].sort((a, b) => a - b), ratio = (high + 0.05) / (low + 0.05);
    looked += 1;
    if (ratio < 4.5) poor.push(own.slice(0, 40) + " " + ratio.toFixed(2));
  }
  return looked < 10 ? ["only " + looked + " texts found"] : poor;
})()"""

FOCUS = """(() => { const e = document.activeElement, s = getComputedStyle(e), box = e.getBoundingClientRect();
  return {words: e.textContent.trim().slice(0, 40), id: e.id, name: e.tagName, left: box.left,
          seen: s.outlineStyle !== "none" && parseFloat(s.outlineWidth) >= 2}; })()"""


def results(pairs=40, minutes_ago=30):
    """Rows of both analyzers: pairs that agree, the newest so many minutes old, and a check standard."""
    dice = random.Random(17)
    newest = datetime.datetime.now(datetime.timezone.utc) - datetime.timedelta(minutes=minutes_ago)
    rows = {"line1": [], "line2": []}
    for i in range(pairs):
        truth = dice.uniform(9.5, 14)
        for analyzer in rows:
            at = (newest - datetime.timedelta(hours=2 * (pairs - 1 - i))).strftime("%Y-%m-%dT%H:%M:%SZ")
            rows[analyzer].append(f"split,{at},protein,S-{i:03d},{truth + dice.gauss(0, 0.02):.2f}")
            rows[analyzer].append(f"check,{at},protein,wheat-low,{10.62 + dice.gauss(0, 0.02):.2f}")
    return {a: "kind,measured_at,measurand,item,value\n" + "\n".join(r) + "\n" for a, r in rows.items()}


class Page(SiteTest):
    @classmethod
    def setUpClass(cls):
        cls.browser = Browser()

    @classmethod
    def tearDownClass(cls):
        cls.browser.close()

    def setUp(self):
        self.browser.events.clear()
        self.browser.call("Network.clearBrowserCookies")
        self.browser.call("Emulation.setScriptExecutionDisabled", value=False)
        self.browser.look_like(*SIZES["desk"], "light")

    def mill(self, comparisons=1, minutes_ago=30, tokens=True):
        names = "\n".join(f"  c{i:02d}: {{title: '{LONG}, Silo {i:02d}', measurand: protein, x: line1, y: line2, every: 2h}}"
                          for i in range(comparisons))
        site = self.make_site(config=CONFIG.format(address="127.0.0.1", title=LONG, comparisons=names))
        if tokens:
            (site.folder / "tokens").write_text("".join(
                f"{role} {name} {hashlib.sha256(token.encode()).hexdigest()}\n"
                for role, name, token in (("operator", "shift-leader", "ooo"), ("reader", "wall", "rrr"))))
        site.start()
        self.addCleanup(self.browser.go, "about:blank")  # before the site goes, so that nothing is asked of it then
        for analyzer, text in results(minutes_ago=minutes_ago).items():
            site.drop(analyzer, "results.csv", text)
        site.drop("line1", "broken.csv", "nonsense\n")
        site.wait_taken()
        wait_until(lambda: site.get("/api/alerts")["alerts"], "the broken file is told")
        return site

    def text(self):
        return self.browser.run("document.body.innerText")

    def sign_in(self, token="ooo"):
        self.browser.run(f"document.getElementById('token').value = '{token}'")
        self.browser.loading(lambda: self.browser.run("document.querySelector('form.sign-in button').click()"))

    def quiet(self, site):
        # What the browser still asked of an earlier site that is gone (an icon) is no fault of this one's pages.
        late = re.compile(r"net::ERR_CONNECTION_\w+ http://127\.0\.0\.1:(?!%s/)" % site.base.rsplit(":", 1)[1])
        self.assertEqual([c for c in self.browser.complaints() if not late.search(c)], [])
        outside = [url for url in self.browser.asked_for() if not url.startswith(site.base + "/")]
        self.assertEqual([url for url in outside if not url.startswith("about:")], [])

    def test_every_page_fits_every_screen_and_can_be_read(self):
        site = self.mill(comparisons=40)
        self.browser.go(site.base + "/sign-in?to=/")
        self.sign_in()
        number = site.get("/api/alerts")["alerts"][0]["id"]
        for path in ("/", "/comparisons/c07", "/comparisons/c07?pairs=20", "/charts/line1/wheat-low/protein", "/alerts",
                     f"/alerts/{number}", "/files", "/sign-in"):
            self.browser.go(site.base + path)
            for size, (width, height) in SIZES.items():
                for scheme in ("light", "dark"):
                    with self.subTest(path=path, size=size, scheme=scheme):
                        self.browser.look_like(width, height, scheme)
                        wide = self.browser.run("document.documentElement.scrollWidth - document.documentElement.clientWidth")
                        self.assertLessEqual(wide, 0, "the page is wider than the screen")
                        self.assertEqual(self.browser.run(CONTRAST), [])
            with self.subTest(path=path, size="A4"):  # 186 mm between the margins, at 96 to the inch
                self.browser.look_like(703, 1000, "light")
                self.browser.call("Emulation.setEmulatedMedia", media="print")
                wide = self.browser.run("document.documentElement.scrollWidth - document.documentElement.clientWidth")
                self.browser.call("Emulation.setEmulatedMedia", media="")
                self.assertLessEqual(wide, 0, "the page is wider than the paper")
            levels = self.browser.run("Array.from(document.querySelectorAll('h1,h2,h3,h4'), (h) => +h.tagName[1])")
            self.assertEqual(levels[0], 1)
            self.assertTrue(all(b - a <= 1 for a, b in zip(levels, levels[1:])), f"{path}: a heading is left out: {levels}")
        self.quiet(site)

    def test_by_keyboard_from_the_skip_link_to_an_acknowledged_alert(self):
        site = self.mill()
        self.browser.go(site.base + "/sign-in?to=/alerts")
        self.sign_in()
        seen = []

        def tab_to(words):
            for _ in range(60):
                self.browser.press("Tab")
                at = self.browser.run(FOCUS)
                seen.append(at["words"])
                self.assertTrue(at["seen"], f"the focus on {at} cannot be seen")
                self.assertGreaterEqual(at["left"], 0)
                if at["words"] == words or at["id"].startswith(words):
                    return
            self.fail(f"{words} is not reached by Tab; {seen}")

        for words in ("Skip to the contents", "Overview", "Alerts (1)", "Files", "Sign out", "Acknowledge"):
            tab_to(words)
        self.browser.press("Enter")
        tab_to("note.")
        self.browser.type("line1 exports anew <b>now</b>")
        # A renewal in the middle of writing keeps what is written, where, and the place in it.
        site.drop("line2", "broken-too.csv", "nonsense\n")
        wait_until(lambda: "Alerts (2)" in self.text(), "the second alert is on the page without loading it again")
        at = self.browser.run("({id: document.activeElement.id, value: document.activeElement.value})")
        self.assertTrue(at["id"].startswith("note."))
        self.assertEqual(at["value"], "line1 exports anew <b>now</b>")
        self.browser.press("Tab")
        self.browser.loading(lambda: self.browser.press("Enter"))
        self.assertIn("/alerts#", self.browser.run("location.pathname + location.hash"))
        alert = next(a for a in site.get("/api/alerts?state=open,acknowledged,resolved")["alerts"] if a["acknowledged"])
        self.assertEqual(alert["acknowledged"]["by"], "shift-leader")
        self.assertEqual(alert["acknowledged"]["note"], "line1 exports anew <b>now</b>")
        self.quiet(site)

    def test_everything_but_the_renewal_works_without_a_script(self):
        site = self.mill()
        self.browser.call("Emulation.setScriptExecutionDisabled", value=True)
        click = "Array.from(document.querySelectorAll('a, button'), (e) => e).find((e) => e.textContent.startsWith('%s')).click()"
        self.browser.go(site.base + "/alerts")
        self.browser.loading(lambda: self.browser.run(click % "Sign in to acknowledge"))
        self.sign_in("wrong")
        self.assertIn("This token is not known.", self.text())
        self.sign_in()
        self.assertIn("Signed in as shift-leader", self.text())
        cookie = self.browser.call("Network.getCookies")["cookies"][0]
        self.assertTrue(cookie["httpOnly"])
        self.assertEqual(cookie["sameSite"], "Strict")
        self.assertNotIn("ooo", cookie["value"])
        self.browser.loading(lambda: self.browser.run(click % "Acknowledge alert"))
        self.browser.go(site.base + "/alerts?state=open,acknowledged,resolved")
        self.assertIn("Acknowledged by shift-leader", self.text())
        self.browser.loading(lambda: self.browser.run(click % "Sign out"))
        self.assertIn("Sign in", self.text())
        self.assertEqual(self.browser.call("Network.getCookies")["cookies"], [])

    def test_the_answer_says_when_it_is_no_longer_current(self):
        site = self.mill()
        self.browser.go(site.base + "/")
        word = "document.querySelector('.foremost .word').innerText.trim()"
        self.assertEqual(self.browser.run(word), "Yes")
        site.stop()
        wait_until(lambda: self.browser.run(word) == "Not current", "a page without its service says so")
        self.assertIn("no proper answer from the service since", self.text())
        self.assertIn("Shown before: Yes.", self.text())
        self.assertIn("Not current", self.browser.run("document.title"))

    def test_a_yes_that_rests_on_old_pairs_is_out_of_date(self):
        site = self.mill(minutes_ago=42 * 24 * 60, tokens=False)
        self.browser.go(site.base + "/")
        self.assertIn("Out of date", self.text())
        self.assertIn("42 days ago", self.text())
        self.assertIn("agreed token CONFIG --role operator", self.text())


if __name__ == "__main__":
    unittest.main()
