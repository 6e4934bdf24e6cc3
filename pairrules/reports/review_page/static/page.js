// What starts the page, and the keys that act on all of it.

const LOOK = "pairrules-review-look";

function look(value) {
  if (value) document.documentElement.dataset.theme = value;
  else delete document.documentElement.dataset.theme;
}

function drawLook() {
  let value = "";
  try { value = localStorage.getItem(LOOK) || ""; } catch { /* The look is then the system's. */ }
  if (!["", "light", "dark"].includes(value)) value = "";
  byId("look").value = value;
  look(value);
  byId("look").addEventListener("change", (event) => {
    look(event.target.value);
    try { localStorage.setItem(LOOK, event.target.value); } catch { /* It holds until the page is closed. */ }
  });
}

function showKeys(shown) {
  byId("keys").hidden = !shown;
  byId("show-keys").setAttribute("aria-expanded", String(shown));
}

function go(id) {
  const place = byId(id);
  place.scrollIntoView({ block: "start" });
  place.focus({ preventScroll: true });
}

const LETTERS = {
  n: () => step(1), p: () => step(-1), "/": () => go("filter-text"),
  l: () => { const button = byId("list").querySelector('button[tabindex="0"]'); if (button) button.focus(); },
  m: () => { if (map) { byId("map").scrollIntoView({ block: "start" }); map.svg.focus({ preventScroll: true }); } },
  d: () => go("detail"), s: () => go("save"), "?": () => showKeys(byId("keys").hidden),
};

function onKey(event) {
  if (event.ctrlKey || event.altKey || event.metaKey || !byId("letters").checked) return;
  if (event.target.closest("input:not([type=checkbox]):not([type=radio]), select, textarea")) {
    if (event.key === "Escape") event.target.blur();
    return;
  }
  const act = LETTERS[event.key];
  if (!act) return;
  event.preventDefault();
  act();
}

// Paper gets every listed pair whole; what is drawn for it is taken away afterwards.
function drawPaper() {
  byId("paper").replaceChildren(...listed.map((pair) => make("article", { class: "paper-pair" }, detailParts(pair, details(pair), { still: true, width: 660 }))));
  if (map) map.look(map.home);
}

function fromAddress() {
  const found = /^#pair=(.+)$/.exec(location.hash);
  if (!found) return null;
  try {
    const name = decodeURIComponent(found[1]);
    return pairs.find((pair) => pair.name === name) || null;
  } catch { return null; }
}

function start() {
  drawLook();
  drawFilter();
  onChosen.push(drawDetail);
  drawMap();
  relist();
  onDecision.push(drawSave, redecide);
  drawSave();
  choosePair(fromAddress() || listed[0] || null, { keepAddress: true });
  byId("show-keys").addEventListener("click", () => showKeys(byId("keys").hidden));
  byId("print").addEventListener("click", () => window.print());
  document.addEventListener("keydown", onKey);
  window.addEventListener("hashchange", () => { const pair = fromAddress(); if (pair && pair !== chosen) choosePair(pair, { scroll: true, keepAddress: true }); });
  window.addEventListener("beforeprint", drawPaper);
  window.addEventListener("afterprint", () => byId("paper").replaceChildren());
  let width = byId("detail").clientWidth;
  let due = 0;
  new ResizeObserver(() => {
    if (Math.abs(byId("detail").clientWidth - width) < 8) return;
    clearTimeout(due);
    due = setTimeout(() => {
      // Somebody who is writing keeps the field; the drawings then follow at the next pair.
      if (byId("detail").contains(document.activeElement) && document.activeElement.matches("input")) return;
      width = byId("detail").clientWidth;
      drawDetail(chosen);
    }, 150);
  }).observe(byId("detail"));
}

start();
