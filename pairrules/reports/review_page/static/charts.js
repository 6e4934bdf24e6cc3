// Line charts: along the route in millimetres, or over the logarithm of frequency.

function niceStep(span, wantedTicks) {
  const raw = span / Math.max(wantedTicks, 1);
  const size = 10 ** Math.floor(Math.log10(raw));
  return size * ([1, 2, 5, 10].find((one) => one * size >= raw) || 10);
}

function ticks(from, to, wantedTicks) {
  const by = niceStep(to - from, wantedTicks);
  const found = [];
  for (let k = Math.ceil(from / by - 1e-9); k * by <= to + by * 1e-9; k += 1) found.push(Number((k * by).toPrecision(12)));
  return found;
}

function decades(from, to) {
  const found = [];
  for (let k = Math.ceil(Math.log10(from) - 1e-9); k <= Math.log10(to) + 1e-9; k += 1) found.push(10 ** k);
  return found.length ? found : [from];
}

// `series`: [{ name, kind, points: [[x, y] or null, …] }], a null breaks the line. `bounds`: [{ name, points }].
// `band`: { from, to, name }, either open. `beyond`: x from which on figures no longer hold, with a word.
// Returns the element, with `cursor(x)` that marks a place along x.
function chart({ title, width, height = 190, xLabel, yLabel, xFrom, xTo, log = false, series, bounds = [], band = null, beyond = null, atLeast = 0, summary, onPoint = null }) {
  const values = [...series, ...bounds].flatMap((one) => one.points.filter(Boolean).map((point) => point[1]));
  if (band) values.push(...[band.from, band.to].filter((value) => value !== null));
  if (!values.length) return null;
  let low = Math.min(...values);
  let high = Math.max(...values);
  const grow = Math.max((high - low) * 0.08, (atLeast - (high - low)) / 2, 1e-9);
  low -= grow;
  high += grow;
  const small = width < 480;
  const left = 60;
  const tagged = [...series, ...bounds, ...(band ? [band] : [])].map((one) => (one.name || "").length);
  const right = small ? 8 : Math.max(60, 16 + 6.4 * Math.max(...tagged));
  const top = 24;
  const bottom = 38;
  const toX = log ? (x) => left + ((Math.log10(x) - Math.log10(xFrom)) / Math.max(Math.log10(xTo / xFrom), 1e-9)) * (width - left - right)
    : (x) => left + ((x - xFrom) / Math.max(xTo - xFrom, 1e-9)) * (width - left - right);
  const toY = (y) => top + ((high - y) / (high - low)) * (height - top - bottom);
  const fixed = (value) => Math.round(value * 10) / 10;
  const lineOf = (points) => points.map((point, i) => (point ? `${i && points[i - 1] ? "L" : "M"}${fixed(toX(point[0]))} ${fixed(toY(point[1]))}` : "")).join("");
  const svg = shape("svg", { class: "chart", viewBox: `0 0 ${width} ${height}`, width, height, role: "img", "aria-label": `${title}. ${summary}` });
  const clampY = (y) => Math.min(Math.max(y, top), height - bottom);
  if (band) {
    const upper = band.to === null ? top : clampY(toY(band.to));
    const lower = band.from === null ? height - bottom : clampY(toY(band.from));
    svg.append(shape("rect", { class: "band", x: left, y: fixed(upper), width: width - left - right, height: fixed(Math.max(lower - upper, 0.5)) }));
    for (const edge of [band.from, band.to]) if (edge !== null) svg.append(shape("path", { class: "bound", d: `M${left} ${fixed(toY(edge))}H${width - right}` }));
  }
  for (const y of ticks(low, high, 4)) {
    svg.append(shape("path", { class: "grid", d: `M${left} ${fixed(toY(y))}H${width - right}` }),
      shape("text", { class: "tick-y", x: left - 6, y: fixed(toY(y)) + 4 }, figure(y, 4)));
  }
  const xTicks = log ? decades(xFrom, xTo) : ticks(xFrom, xTo, small ? 4 : 8);
  const every = Math.max(Math.ceil((xTicks.length * 58) / (width - left - right)), 1);
  // Where there is no room for tags a label near the right edge ends there.
  const anchor = (x) => (toX(x) > width - 30 ? "end" : "middle");
  xTicks.forEach((x, i) => {
    svg.append(shape("path", { class: "grid", d: `M${fixed(toX(x))} ${top}V${height - bottom + 4}` }));
    if (i % every === 0) svg.append(shape("text", { class: "tick-x", "text-anchor": anchor(x), x: fixed(Math.min(toX(x), width - 3)), y: height - bottom + 16 }, log ? hertz(x) : figure(x)));
  });
  svg.append(shape("text", { class: "axis", "text-anchor": "middle", x: small ? width / 2 : left + (width - left - right) / 2, y: height - 4 }, xLabel),
    shape("text", { class: "axis axis-y", x: 8, y: 15 }, yLabel));
  if (beyond && beyond.from < xTo) {
    const x = Math.max(toX(Math.max(beyond.from, xFrom)), left);
    svg.append(shape("rect", { class: "beyond", x: fixed(x), y: top, width: fixed(width - right - x), height: height - top - bottom }),
      shape("path", { class: "beyond-edge", d: `M${fixed(x)} ${top}V${height - bottom}` }));
  }
  for (const bound of bounds) svg.append(shape("path", { class: "bound", d: lineOf(bound.points) }));
  const tags = [];
  for (const one of series) {
    svg.append(shape("path", { class: `curve ${one.kind}`, d: lineOf(one.points) }));
    const last = [...one.points].reverse().find(Boolean);
    if (one.every) one.points.forEach((point, i) => { if (point && i % one.every === 0) svg.append(dot(one.kind, toX(point[0]), toY(point[1]))); });
    if (last && !small && one.name) tags.push({ y: toY(last[1]), text: one.name, kind: one.kind });
  }
  for (const bound of bounds) {
    const last = [...bound.points].reverse().find(Boolean);
    if (last && !small) tags.push({ y: toY(last[1]), text: bound.name, kind: "bound" });
  }
  if (band && !small && band.name) tags.push({ y: clampY(toY(((band.from ?? low) + (band.to ?? high)) / 2)), text: band.name, kind: "bound" });
  tags.sort((a, b) => a.y - b.y);
  tags.forEach((tag, i) => { tag.y = Math.max(tag.y, i ? tags[i - 1].y + 13 : top + 4); });
  const over = tags.length ? Math.max(tags[tags.length - 1].y - (height - bottom + 4), 0) : 0;
  tags.forEach((tag) => svg.append(shape("text", { class: `tag ${tag.kind}`, x: width - right + 6, y: fixed(tag.y - over + 4) }, tag.text)));
  const cursor = shape("path", { class: "cursor hidden" });
  svg.append(cursor);
  if (onPoint) {
    svg.addEventListener("pointermove", (event) => {
      const box = svg.getBoundingClientRect();
      const x = (((event.clientX - box.left) / box.width) * width - left) / (width - left - right);
      if (x >= 0 && x <= 1) onPoint(xFrom + x * (xTo - xFrom));
    });
  }
  const legend = make("div", { class: "legend" },
    series.filter((one) => one.name).map((one) => make("span", null, sample(`curve ${one.kind}`), ` ${one.name}`)),
    bounds.length || band ? make("span", null, sample("bound"), ` ${bounds.map((one) => one.name).concat(band ? [band.name] : []).join(", ")}`) : "",
    beyond && beyond.from < xTo ? make("span", null, make("span", { class: "beyond-key", "aria-hidden": "true" }), ` ${beyond.word}`) : "");
  const element = make("figure", { class: "chart-frame" }, make("figcaption", null, title), svg, legend);
  element.cursor = (x) => {
    const inside = x >= xFrom && x <= xTo;
    cursor.classList.toggle("hidden", !inside);
    if (inside) cursor.setAttribute("d", `M${fixed(toX(x))} ${top}V${height - bottom}`);
  };
  return element;
}

const DOTS = { source: "M-4 3h8l-4-7z", trace: "M-3-3h6v6h-6z", cable: "M-3.5 0a3.5 3.5 0 1 0 7 0a3.5 3.5 0 1 0-7 0z", load: "M0-4.5 4.5 0 0 4.5-4.5 0z", total: "M-4-4 4 4M-4 4 4-4" };

function dot(kind, x, y) {
  return shape("path", { class: `dot ${kind}`, d: DOTS[kind] || DOTS.cable, transform: `translate(${Math.round(x * 10) / 10} ${Math.round(y * 10) / 10})` });
}

// The length along plus, and what is known at a place of it.

function spacingPoints(stretches) {
  const points = [];
  let end = null;
  for (const [from, to, first, middle, last, coupled] of stretches) {
    if (!coupled || first === null) { points.push(null); end = null; continue; }
    if (end !== null && Math.abs(end - from) > 1e-3) points.push(null);
    points.push([from, first], [(from + to) / 2, middle], [to, last]);
    end = to;
  }
  return points;
}

function stretchAt(stretches, x, from, to) { return stretches.find((one) => x >= one[from] - 1e-6 && x <= one[to] + 1e-6); }

function placeAt(drawing, x) {
  const one = stretchAt(drawing.spacing, x, 0, 1);
  if (!one) return null;
  const t = one[1] > one[0] ? (x - one[0]) / (one[1] - one[0]) : 0;
  const gap = one[5] && one[2] !== null ? (t < 0.5 ? one[2] + (one[3] - one[2]) * 2 * t : one[3] + (one[4] - one[3]) * (2 * t - 1)) : null;
  return { x: one[7] + (one[9] - one[7]) * t, y: one[8] + (one[10] - one[8]) * t, layer: one[6], gap };
}

// The running difference where the place on plus lies: its points are bends of a line on the board as well as of the curve.
function differenceAt(points, place) {
  let best = null;
  for (let i = 1; i < points.length; i += 1) {
    const [a, b] = [points[i - 1], points[i]];
    if (a[2] !== place.layer || b[2] !== place.layer) continue;
    const [dx, dy] = [b[3] - a[3], b[4] - a[4]];
    const t = Math.min(Math.max(((place.x - a[3]) * dx + (place.y - a[4]) * dy) / Math.max(dx * dx + dy * dy, 1e-9), 0), 1);
    const far = Math.hypot(a[3] + t * dx - place.x, a[4] + t * dy - place.y);
    if (!best || far < best.far) best = { far, along: a[0] + t * (b[0] - a[0]), difference: a[1] + t * (b[1] - a[1]) };
  }
  // Farther off than this the legs face each other nowhere near.
  return best && best.far < 500 ? best : null;
}

function curvesAlong(drawing, width, onPoint, height) {
  const found = [];
  const stretches = drawing.spacing;
  const xTo = stretches.length ? stretches[stretches.length - 1][1] : Math.max(0, ...drawing.impedance.map((one) => one[3]));
  const limits = (figureName) => drawing.limits.filter((limit) => limit.figure === figureName);
  const gaps = spacingPoints(stretches);
  const gapValues = gaps.filter(Boolean).map((point) => point[1]);
  if (gapValues.length) {
    const least = Math.max(...limits("gap_mm").map((limit) => limit.least).filter((v) => v !== null), -Infinity);
    const most = Math.min(...limits("gap_mm").map((limit) => limit.most).filter((v) => v !== null), Infinity);
    const banded = limits("gap_mm").length > 0;
    found.push(chart({
      title: "Gap between the legs along plus", width, height, xFrom: 0, xTo, xLabel: "track length of plus from the source [mm]", yLabel: "gap [mm]", atLeast: 0.05, onPoint,
      series: [{ name: "gap", kind: "gap", points: gaps }],
      band: banded ? { from: Number.isFinite(least) ? least : null, to: Number.isFinite(most) ? most : null, name: "band" } : null,
      summary: `${figure(Math.min(...gapValues))} to ${figure(Math.max(...gapValues))} mm where the legs run side by side`
        + `${banded ? `; the band is ${Number.isFinite(least) ? figure(least) : "0"} to ${Number.isFinite(most) ? figure(most) : "any"} mm` : "; no band is set"}`,
    }));
  }
  if (drawing.difference.length) {
    const points = drawing.difference.map((one) => [one[0], one[1]]);
    const most = Math.min(...limits("length_mismatch_mm").map((limit) => limit.most).filter((v) => v !== null), Infinity);
    const last = points[points.length - 1];
    found.push(chart({
      title: "Running difference of the lengths, plus less minus", width, height, xFrom: 0, xTo: Math.max(xTo, last[0]), xLabel: "length of plus from the source, barrels counted [mm]",
      yLabel: "difference [mm]", atLeast: 0.2,
      series: [{ name: "difference", kind: "difference", points }],
      band: Number.isFinite(most) ? { from: -most, to: most, name: "allowed" } : null,
      summary: `from ${figure(points[0][1])} mm at the source to ${figure(last[1])} mm at the load${Number.isFinite(most) ? `; ${figure(most)} mm either way is allowed at the load` : ""}`,
    }));
  }
  const both = drawing.impedance.filter((one) => one[0] === "both" && one[6] !== null);
  if (both.length) {
    const points = [];
    let end = null;
    for (const one of both) {
      if (end !== null && Math.abs(end - one[2]) > 1e-3) points.push(null);
      points.push([one[2], one[6]], [one[3], one[6]]);
      end = one[3];
    }
    const values = both.map((one) => one[6]);
    const held = limits("impedance_diff_ohm");
    const least = Math.max(...held.map((limit) => limit.least).filter((v) => v !== null), -Infinity);
    const most = Math.min(...held.map((limit) => limit.most).filter((v) => v !== null), Infinity);
    found.push(chart({
      title: "Differential impedance along plus", width, height, xFrom: 0, xTo, xLabel: "track length of plus from the source [mm]", yLabel: "impedance [ohm]", atLeast: 4, onPoint,
      series: [{ name: "impedance", kind: "impedance", points }],
      band: held.length ? { from: Number.isFinite(least) ? least : null, to: Number.isFinite(most) ? most : null, name: "allowed" } : null,
      summary: `${figure(Math.min(...values), 1)} to ${figure(Math.max(...values), 1)} ohm where the legs run side by side`,
    }));
  }
  return found.filter(Boolean);
}

// Below this a conversion is none at all: legs exactly alike leave but the rounding of sums.
const NOTHING_DB = -250;

const CAUSES = ["source", "trace", "cable", "load", "total"];

// Bounds on one of the figures as lines; a mask is straight over the logarithm of frequency between its points.
function boundLines(drawing, names, from, to) {
  return drawing.limits.filter((limit) => names.includes(limit.figure)).flatMap((limit) => {
    if (limit.over.length) return [{ name: limit.rule, points: limit.over }];
    return [limit.least, limit.most].filter((value) => value !== null)
      .map((value) => ({ name: limit.rule, points: [[from, value], [to, value]] }));
  });
}

function curvesOverFrequency(drawing, width, tall) {
  const conversion = drawing.conversion;
  if (!conversion || !conversion.frequency.length) return [];
  const frequency = conversion.frequency;
  const [from, to] = [frequency[0], Math.max(frequency[frequency.length - 1], frequency[0] * 1.001)];
  const curveOf = (name, kind, word) => {
    const values = conversion.curves[name];
    if (!values || values.every((value) => value === null || Math.abs(value) > -NOTHING_DB)) return null;
    const every = Math.max(Math.round(values.length / 5), 1);
    return { name: word, kind, points: values.map((value, i) => (value === null || value < NOTHING_DB || value > -NOTHING_DB ? null : [frequency[i], value])), every };
  };
  const beyond = conversion.upTo === null ? null : { from: conversion.upTo, word: `above ${hertz(conversion.upTo)} the cross-sections no longer hold` };
  const causes = CAUSES.map((cause) => curveOf(`${cause}_db`, cause, cause)).filter(Boolean);
  const none = CAUSES.filter((cause) => (conversion.curves[`${cause}_db`] || []).some((value) => value !== null && value < NOTHING_DB));
  const found = [];
  if (causes.length) {
    found.push(chart({
      title: `Common mode turned into signal, by cause${none.length ? `; ${none.join(" and ")} ${none.length > 1 ? "convert" : "converts"} none` : ""}`, width, height: 250 * tall, xFrom: from, xTo: to, log: true, xLabel: "frequency", yLabel: "conversion [dB], lower is better", atLeast: 10, beyond,
      series: causes, bounds: boundLines(drawing, CAUSES.map((cause) => `${cause}_db`), from, to),
      summary: causes.map((one) => `${one.name} ${ends(one.points)}`).join("; "),
    }));
  }
  const link = [curveOf("rejection_db", "gap", "link with receiver"), curveOf("conversion_loss_db", "difference", "link alone")].filter(Boolean);
  if (link.length) {
    found.push(chart({
      title: "Rejection of common mode", width, height: 210 * tall, xFrom: from, xTo: to, log: true, xLabel: "frequency", yLabel: "rejection [dB], higher is better", atLeast: 10, beyond,
      series: link, bounds: boundLines(drawing, ["rejection_db", "conversion_loss_db"], from, to),
      summary: link.map((one) => `${one.name} ${ends(one.points)}`).join("; "),
    }));
  }
  return found.filter(Boolean);
}

function ends(points) {
  const known = points.filter(Boolean);
  const [first, last] = [known[0], known[known.length - 1]];
  return `${figure(first[1], 1)} dB at ${hertz(first[0])} to ${figure(last[1], 1)} dB at ${hertz(last[0])}`;
}
