// Elements made from code, so that no text of the board is ever read as markup; and the page's own data.

const board = JSON.parse(document.getElementById("board").textContent);
const pairs = board.pairs;
pairs.forEach((pair, index) => { pair.index = index; });

const SEVERITIES = ["blocker", "review", "note"];
const VERDICTS = [["flag", "flagged"], ["undecided", "undecided"], ["waived", "waived"], ["pass", "passed"]];
const VERDICT_WORDS = Object.fromEntries(VERDICTS);

let flaggedSoFar = 0;
for (const pair of pairs) {
  const standing = pair.findings.filter((finding) => !finding.waived);
  pair.worst = SEVERITIES.find((word) => standing.some((finding) => finding.severity === word)) || "";
  pair.sign = pair.verdict === "flag" ? pair.worst : pair.verdict;
  pair.number = pair.verdict === "flag" ? ++flaggedSoFar : 0;
}

function byId(id) { return document.getElementById(id); }

// What all pairs share stands once, with the board. Rows of the spacing become [from, to, three gaps, coupled, layer, start x, start y, end x, end y].
function details(pair) {
  const found = JSON.parse(byId(`pair-${pair.index}`).textContent);
  found.figures = found.figures.map((value, i) => [board.figures[i][0], value, board.figures[i][1]]);
  found.limits = found.limits.map(([index, outcome, measured, limit, missing]) => {
    const [rule, severity, says, unit, source] = board.limits[index];
    return { rule, severity, says, unit, source, outcome, measured, limit, missing };
  });
  let end = [];
  if (found.drawing) {
    found.drawing.spacing = found.drawing.spacing.map((row) => {
      const start = row.length > 9 ? row.slice(9) : end;
      end = row.slice(7, 9);
      return [...row.slice(0, 7), ...start, ...end];
    });
  }
  return found;
}

function furnish(element, attributes, children) {
  for (const [name, value] of Object.entries(attributes || {})) {
    if (value === null || value === undefined || value === false) continue;
    if (name.startsWith("on")) element.addEventListener(name.slice(2), value);
    else element.setAttribute(name, value === true ? "" : value);
  }
  for (const child of children.flat(Infinity)) if (child !== null && child !== undefined && child !== "") element.append(child);
  return element;
}

function make(tag, attributes, ...children) { return furnish(document.createElement(tag), attributes, children); }

function shape(tag, attributes, ...children) {
  return furnish(document.createElementNS("http://www.w3.org/2000/svg", tag), attributes, children);
}

// Every verdict and severity has a form of its own, so that colour is never the only sign.
const FORMS = {
  blocker: "M-4-9h8l5 5v8l-5 5h-8l-5-5v-8z",
  review: "M0-10 10 8h-20z",
  note: "M-9 0a9 9 0 1 0 18 0a9 9 0 1 0-18 0z",
  undecided: "M0-10 10 0 0 10-10 0z",
  waived: "M-9-5h18v10h-18z",
  pass: "M-9 0l3-3 4 4 8-8 3 3-11 11z",
};

function sign(kind, size = 16) {
  return shape("svg", { class: `sign ${kind}`, viewBox: "-11 -11 22 22", width: size, height: size, "aria-hidden": "true" },
    shape("path", { d: FORMS[kind] || FORMS.note }));
}

function letter(index) {
  const letters = "abcdefghijklmnopqrstuvwxyz";
  return index < 26 ? letters[index] : letter(Math.floor(index / 26) - 1) + letters[index % 26];
}

function counted(count, word, plural = `${word}s`) { return `${count} ${count === 1 ? word : plural}`; }

function figure(value, digits = 3) {
  if (value === null || value === undefined) return "unknown";
  const size = Math.abs(value);
  const text = String(Number(value.toFixed(size >= 1000 ? 0 : size >= 100 ? Math.min(1, digits) : digits)));
  return text.replace("-", "−");
}

function shownUnit(unit) { return unit.replace("mm2", "mm²"); }

function coordinates(x, y) {
  const { name, mm, decimals } = board.unit;
  const shown = (micrometres) => (micrometres / 1000 / mm).toFixed(decimals).replace("-", "−");
  return `(${shown(x)}, ${shown(-y)}) ${name}`;
}

function hertz(value) {
  const [scale, unit] = [[1e9, "GHz"], [1e6, "MHz"], [1e3, "kHz"]].find(([size]) => value >= size) || [1, "Hz"];
  return `${Number((value / scale).toPrecision(4))} ${unit}`;
}

// What a view shows beside colour: how each kind of line is drawn.
function sample(kind) {
  return shape("svg", { class: "sample", viewBox: "0 0 28 12", width: 28, height: 12, "aria-hidden": "true" },
    shape("path", { class: kind, d: "M1 6H27" }));
}
