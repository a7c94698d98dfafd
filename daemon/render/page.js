// Keeps the page current: asks /api/status every few seconds, fetches the page anew when it changed, and says
// plainly when what is shown is no longer current. Without this script the page is complete, only not renewed.
"use strict";
(() => {
  const askEvery = 5000, jitter = 1500;      // milliseconds
  const silentAfter = 20000;                 // no answer for so long: not current
  const unchangedAfter = 120000;             // the service renews its figures far more often
  let tag = null, answeredAt = performance.now(), changedAt = answeredAt, trouble = "", timer = 0, asking = false;

  const shownAt = () => document.getElementById("main").dataset.at;
  const shownTime = () => shownAt().slice(0, 16).replace("T", " ") + " UTC";
  const textOf = (selector) => Array.from(document.querySelectorAll(selector), (e) => e.textContent).join(". ");

  function showStale() {
    const now = performance.now();
    let words = "";
    if (now - answeredAt > silentAfter)
      words = "Not current: no proper answer from the service for " + Math.round((now - answeredAt) / 1000) +
        " s" + (trouble ? " (" + trouble + ")" : "") + ". What is shown is as of " + shownTime() + ".";
    else if (now - changedAt > unchangedAfter)
      words = "Not current: the service answers but has not renewed its figures since " + shownTime() + ".";
    const banner = document.getElementById("stale");
    banner.hidden = words === "";
    if (banner.textContent !== words) banner.textContent = words;
  }

  // An element is found again by its id, or as the n-th link to the same place.
  function remember(element) {
    if (!element || element === document.body) return null;
    if (element.id) return () => document.getElementById(element.id);
    const details = element.closest("details[id]");
    if (details && element.tagName === "SUMMARY")
      return () => { const d = document.getElementById(details.id); return d && d.querySelector("summary"); };
    if (element.tagName !== "A") return null;
    const alike = (root) => Array.from(root.querySelectorAll("a")).filter(
      (a) => a.getAttribute("href") === element.getAttribute("href"));
    const position = alike(document).indexOf(element);
    return () => alike(document)[position];
  }

  function replaceWith(fresh) {
    const open = Array.from(document.querySelectorAll("details[open][id]"), (d) => d.id);
    const scrolled = Array.from(document.querySelectorAll("details[open][id] .scroll"),
      (s) => [s.closest("details").id, s.scrollTop, s.scrollLeft]);
    const focused = remember(document.activeElement);
    const x = window.scrollX, y = window.scrollY, answerBefore = textOf(".foremost p");
    for (const part of ["main", "nav", "footer"]) {
      const here = document.querySelector(part), there = fresh.querySelector(part);
      if (!here || !there) continue;
      here.replaceChildren(...Array.from(there.childNodes, (node) => document.importNode(node, true)));
      if (there.dataset.at) here.dataset.at = there.dataset.at;
    }
    document.title = fresh.title;
    for (const id of open) { const d = document.getElementById(id); if (d) d.open = true; }
    for (const [id, top, left] of scrolled) {
      const s = document.getElementById(id) && document.getElementById(id).querySelector(".scroll");
      if (s) { s.scrollTop = top; s.scrollLeft = left; }
    }
    const again = focused && focused();
    if (again && again !== document.activeElement) again.focus({preventScroll: true});
    window.scrollTo({left: x, top: y, behavior: "instant"});
    const answer = textOf(".foremost .word, .foremost .sentence");
    if (textOf(".foremost p") !== answerBefore) document.getElementById("live").textContent = answer;
  }

  async function fetchPage() {
    const response = await fetch(window.location.pathname + window.location.search, {cache: "no-store", signal: AbortSignal.timeout(10000)});
    if (!response.ok) throw new Error("status " + response.status);
    const fresh = new DOMParser().parseFromString(await response.text(), "text/html");
    if (!fresh.getElementById("main")) throw new Error("not this page");
    replaceWith(fresh);
  }

  async function ask() {
    const headers = tag ? {"If-None-Match": tag} : {};
    const response = await fetch("/api/status", {headers, cache: "no-store", signal: AbortSignal.timeout(10000)});
    if (response.status === 401 || response.status === 403) throw new Error("signed out: load this page anew");
    if (response.status !== 304) {
      if (!response.ok) throw new Error("status " + response.status);
      const status = await response.json();
      if (status.at !== shownAt()) await fetchPage();
      tag = response.headers.get("ETag");
      changedAt = performance.now();
    }
    answeredAt = performance.now();
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
    for (const d of document.querySelectorAll("details:not([open])"))
      if (d.querySelectorAll("tr").length <= printedRows) { d.open = true; opened.push(d); }
  });
  window.addEventListener("afterprint", () => { for (const d of opened.splice(0)) d.open = false; });
  timer = window.setTimeout(turn, askEvery);
})();
