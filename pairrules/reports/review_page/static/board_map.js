// The whole board from above: its edge, every pair, and the numbered places of what is flagged.

let map = null;
const shownLayers = new Set(board.layers.map((_, index) => index));
let mapPins = [];

function drawMap() {
  const extent = board.extent || boxAround(pairs.map((pair) => pair.box).filter(Boolean));
  if (!extent) {
    byId("map-picture").append(make("p", null, "There is nothing to draw: the file has no edge, and no pair has copper."));
    return;
  }
  map = new Picture({ label: "The board from above. Arrow keys move, plus and minus zoom, zero shows all.", extent, told: (scale) => settleMap(scale) });
  if (board.outline) map.body.append(shape("path", { class: "edge", d: board.outline }));
  for (const [ref, path] of board.parts) map.body.append(shape("path", { class: "map-part", d: path }, shape("title", null, ref)));
  // Flagged pairs lie on top.
  for (const pair of [...pairs].reverse()) {
    const group = shape("g", { class: `map-pair ${pair.verdict} ${pair.worst}`, id: `map-${pair.index}`, onclick: () => choosePair(pair, { scroll: true }) },
      shape("title", null, `${pair.name}: ${pair.verdict === "flag" ? pair.worst : VERDICT_WORDS[pair.verdict]}`));
    for (const [layer, path] of pair.copper || []) group.append(shape("path", { class: "map-copper", d: path, "data-layer": layer, "fill-rule": "evenodd" }));
    // One path for all of a layer, as a great board has hundreds of pairs in thousands of pieces.
    for (const layer of pair.layers) {
      const own = pair.lines.flat().filter((piece) => piece[0] === layer);
      for (const width of new Set(own.map((piece) => piece[1]))) {
        group.append(shape("path", { class: "map-wide", d: own.filter((piece) => piece[1] === width).map((piece) => piece[2]).join(""), "stroke-width": width || 1, "data-layer": layer }));
      }
      const whole = own.map((piece) => piece[2]).join("");
      group.append(shape("path", { class: "map-line", d: whole, "data-layer": layer }), shape("path", { class: "map-grip", d: whole, "data-layer": layer }));
    }
    map.body.append(group);
  }
  // As tall as the board's shape asks for; style set here is not markup and passes the page's policy.
  map.svg.removeAttribute("height");
  map.svg.style.aspectRatio = String(map.home[2] / map.home[3]);
  byId("map-picture").append(map.element);
  byId("map-controls").append(make("fieldset", { class: "layers" }, make("legend", null, "Layers shown"), board.layers.map((name, index) => !pairs.some((pair) => onLayer(pair, name)) ? "" :
    make("label", { class: "tick" }, make("input", {
      type: "checkbox", name: "map-layer", value: index, checked: true,
      onchange: (event) => { shownLayers[event.target.checked ? "add" : "delete"](index); showLayers(); },
    }), ` ${name}`))));
  byId("map-legend").append(
    ...[["blocker", "blocker"], ["review", "review"], ["note", "note"]].map(([kind, word]) => make("span", null, sign(kind), ` ${word}`)),
    make("span", null, sample("map-line map-sample flag"), " flagged"), make("span", null, sample("map-line map-sample undecided"), " undecided"),
    make("span", null, sample("map-line map-sample waived"), " waived"), make("span", null, sample("map-line map-sample pass"), " passed"),
    make("span", { class: "small" }, "Numbers are those of the list."));
  onListed.push(markMap);
  onChosen.push(chooseOnMap);
  markMap();
}

function boxAround(boxes) {
  if (!boxes.length) return null;
  const x = Math.min(...boxes.map((box) => box[0]));
  const y = Math.min(...boxes.map((box) => box[1]));
  return [x, y, Math.max(...boxes.map((box) => box[0] + box[2])) - x, Math.max(...boxes.map((box) => box[1] + box[3])) - y];
}

function markMap() {
  if (!map) return;
  const among = new Set(listed);
  for (const pair of pairs) byId(`map-${pair.index}`).classList.toggle("faint", !among.has(pair));
  mapPins = [];
  for (const pair of listed) {
    if (!pair.number) continue;
    for (const finding of pair.findings) {
      if (finding.waived) continue;
      for (const [layer, , x, y] of finding.at) {
        const at = board.layers.indexOf(layer);
        if (at < 0 || shownLayers.has(at)) mapPins.push({ pair, kind: finding.severity, x, y });
      }
    }
    if (!pair.findings.some((finding) => finding.at.length) && pair.box) {
      mapPins.push({ pair, kind: pair.worst, x: pair.box[0] + pair.box[2] / 2, y: pair.box[1] + pair.box[3] / 2 });
    }
  }
  settleMap(map.scale);
}

// Places of one pair that would lie on one another share a pin.
function settleMap(scale) {
  const shown = [];
  for (const one of mapPins) {
    if (!shown.some((other) => other.pair === one.pair && Math.hypot(other.x - one.x, other.y - one.y) < 26 * scale)) shown.push(one);
  }
  for (const one of shown) {
    one.element = pin(one.kind, String(one.pair.number));
    one.element.classList.toggle("chosen", one.pair === chosen);
    one.element.addEventListener("click", () => choosePair(one.pair, { scroll: true }));
    one.element.append(shape("title", null, `${one.pair.number}: ${one.pair.name}`));
  }
  settle(shown, scale);
  map.marks.replaceChildren(...shown.map((one) => one.element));
}

function showLayers() {
  for (const path of map.body.querySelectorAll("[data-layer]")) path.classList.toggle("hidden", !shownLayers.has(Number(path.dataset.layer)));
  markMap();
}

function chooseOnMap(pair) {
  map.body.querySelectorAll(".map-pair.chosen").forEach((group) => group.classList.remove("chosen"));
  if (pair) {
    const group = byId(`map-${pair.index}`);
    group.classList.add("chosen");
    group.parentNode.append(group);
  }
  settleMap(map.scale);
}
