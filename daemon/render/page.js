// Keeps the page current: asks for it every few seconds by its tag, puts a changed one in place of the old, and
// says plainly when what is shown is no longer current. Without this script the page is complete, only not
// renewed.
"use strict";
(() => {
  const askEvery = 5000, jitter = 1500;      // milliseconds
  const silentAfter = 12000;                 // no answer for so long: not current
  const unchangedAfter = 120000;             // the service renews its figures far more often
  const main = () => document.getElementById("main");
  if (!main() || !main().dataset.tag) return;  // a page that does not change by itself
  const title = document.title;
  let answeredAt = performance.now(), answeredClock = new Date(), lag = 0, trouble = "", timer = 0, asking = false;

  const inWords = (date) => date.toISOString().slice(0, 19).replace("T", " ") + " UTC";
  const shownTime = () => main().dataset.at.slice(0, 16).replace("T", " ") + " UTC";
  const textOf = (selector) => Array.from(document.querySelectorAll(selector), (e) => e.textContent).join(". ");

  function staleWords() {
    const silent = performance.now() - answeredAt;
    if (silent > silentAfter)
      return "Not current: no proper answer from the service since " + inWords(answeredClock) + ", " +
        Math.round(silent / 1000) + " s" + (trouble ? " (" + trouble + ")" : "") + ". What is shown is as of " +
        shownTime() + ".";
    if (lag > unchangedAfter)
      return "Not current: the service answers but has not renewed its figures since " + shownTime() + ".";
    return "";
  }

  // The answer in large letters must not outlive its proof: it says "Not current" until the service is heard again.
  function showStale() {
    const words = staleWords(), stale = words !== "";
    const banner = document.getElementById("stale");
    banner.hidden = !stale;
    if (banner.textContent !== words) banner.textContent = words;
    document.documentElement.classList.toggle("not-current", stale);
    for (const word of document.querySelectorAll(".foremost .word span")) {
      if (word.dataset.was === undefined) word.dataset.was = word.textContent;
      word.textContent = stale ? "Not current" : word.dataset.was;
      const before = word.closest(".answer").querySelector(".before");
      before.hidden = !stale;
      before.textContent = stale ? "Shown before: " + word.dataset.was + "." : "";
    }
    document.title = stale ? "Not current: " + title : title;
  }

  // An element is found again by its id, or as the n-th link to the same place.
  function remember(element) {
    if (!element || element === document.body) return null;
    if (element.id) return () => document.getElementById(element.id);
    const details = element.closest("details[id]");
    if (details && element.tagName === "SUMMARY")
      return () => { const d = document.getElementById(details.id); return d && d.querySelector("summary"); };
    if (element.tagName === "BUTTON" && element.form) {
      const form = element.form.getAttribute("action");
      return () => document.querySelector('form[action="' + form + '"] button');
    }
    if (element.tagName !== "A") return null;
    const alike = (root) => Array.from(root.querySelectorAll("a")).filter(
      (a) => a.getAttribute("href") === element.getAttribute("href"));
    const position = alike(document).indexOf(element);
    return () => alike(document)[position];
  }

  const fields = () => Array.from(document.querySelectorAll("main input[id], main textarea[id]"));

  function replaceWith(fresh) {
    const open = Array.from(document.querySelectorAll("details[open][id]"), (d) => d.id);
    const written = fields().filter((f) => f.value !== f.defaultValue).map((f) => [f.id, f.value]);
    const scrolled = Array.from(document.querySelectorAll("details[open][id] .scroll"),
      (s) => [s.closest("details").id, s.scrollTop, s.scrollLeft]);
    const active = document.activeElement, focused = remember(active);
    const selected = active && typeof active.selectionStart === "number" ? [active.selectionStart, active.selectionEnd] : null;
    const x = window.scrollX, y = window.scrollY, answerBefore = textOf(".foremost p:not(.before)");
    for (const part of ["main", "header", "footer"]) {
      const here = document.querySelector(part), there = fresh.querySelector(part);
      if (!here || !there) continue;
      here.replaceChildren(...Array.from(there.childNodes, (node) => document.importNode(node, true)));
      if (part === "main") { here.dataset.at = there.dataset.at; here.dataset.tag = there.dataset.tag; }
    }
    for (const id of open) { const d = document.getElementById(id); if (d) d.open = true; }
    for (const [id, value] of written) { const f = document.getElementById(id); if (f) f.value = value; }
    for (const [id, top, left] of scrolled) {
      const s = document.getElementById(id) && document.getElementById(id).querySelector(".scroll");
      if (s) { s.scrollTop = top; s.scrollLeft = left; }
    }
    const again = focused && focused();
    if (again && again !== document.activeElement) {
      again.focus({preventScroll: true});
      if (selected && again.setSelectionRange) again.setSelectionRange(...selected);
    }
    window.scrollTo({left: x, top: y, behavior: "instant"});
    if (textOf(".foremost p:not(.before)") !== answerBefore)
      document.getElementById("live").textContent = textOf(".foremost .word, .foremost .sentence");
  }

  // The tag leaves out when the figures were made; that comes in a header field of every answer.
  function stamp(response) {
    const renewed = new Date(response.headers.get("Last-Modified")), now = new Date(response.headers.get("Date"));
    if (isNaN(renewed) || isNaN(now)) { lag = 0; return; }
    lag = now - renewed;
    main().dataset.at = renewed.toISOString();
    const shown = document.getElementById("as-of");
    if (shown) shown.textContent = shownTime();
  }

  async function ask() {
    const response = await fetch(window.location.pathname + window.location.search, {
      headers: {"If-None-Match": 'W/"' + main().dataset.tag + '"'},
      cache: "no-store", redirect: "manual", signal: AbortSignal.timeout(10000)});
    if (response.type === "opaqueredirect" || response.status === 401 || response.status === 403)
      throw new Error("signed out: load this page anew");
    if (response.status !== 304) {
      if (!response.ok) throw new Error("status " + response.status);
      const fresh = new DOMParser().parseFromString(await response.text(), "text/html");
      if (!fresh.getElementById("main")) throw new Error("not this page");
      replaceWith(fresh);
    }
    stamp(response);
    answeredAt = performance.now();
    answeredClock = new Date();
    trouble = "";
  }

  async function turn() {
    window.clearTimeout(timer);
    if (document.hidden || asking) return;
    asking = true;
    try { await ask(); } catch (error) { trouble = error.message; }
    asking = false;
    showStale();
    timer = window.setTimeout(turn, askEvery + Math.random() * jitter);
  }

  document.addEventListener("visibilitychange", () => { if (!document.hidden) { showStale(); turn(); } });
  // On paper short tables are opened; long ones would bury the figures under pages of numbers, so those print only
  // when the reader has opened them.
  const printedRows = 40, opened = [];
  window.addEventListener("beforeprint", () => {
    for (const d of document.querySelectorAll("details:not([open]):not(.acknowledge)"))
      if (d.querySelectorAll("tr").length <= printedRows) { d.open = true; opened.push(d); }
  });
  window.addEventListener("afterprint", () => { for (const d of opened.splice(0)) d.open = false; });
  timer = window.setTimeout(turn, askEvery);
})();
