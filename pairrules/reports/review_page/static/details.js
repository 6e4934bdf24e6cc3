// One pair in detail, drawn when it is asked for; `still` for paper, where nothing can be pressed.

let record = null;

function drawDetail(pair) {
  const place = byId("detail");
  if (!pair) {
    record = null;
    place.replaceChildren(make("h2", { id: "detail-title", tabindex: "-1" }, "No pair is chosen"), make("p", null, "Choose one in the list or on the board."));
    return;
  }
  record = details(pair);
  place.replaceChildren(...detailParts(pair, record, { still: false, width: Math.max(place.clientWidth - 2, 280) }));
}

function detailParts(pair, detail, { still, width }) {
  const picture = detail.drawing ? pairPicture(pair, detail.drawing, { still, width }) : null;
  const shown = { picture, still };
  return [
    heading(pair, detail, still),
    picture ? picture.whole : make("p", null, "There is no drawing of this pair."),
    findingsOf(pair, shown),
    detail.drawing ? alongRoute(pair, detail, shown, width) : null,
    overFrequency(detail, width, still),
    limitsOf(detail, still),
    figuresOf(detail),
    restsOn(detail, still),
  ].filter(Boolean);
}

function heading(pair, detail, still) {
  const [source, load] = detail.ends;
  const series = detail.series.map(([ref, worth, leg]) => `${ref}${worth ? ` ${worth}` : ""} (${leg})`).join(", ");
  const lines = detail.lines.some(Boolean) ? `line ${detail.lines.map((line) => line || "?").join(" and ")} of the file` : "";
  const title = still ? { class: "paper-title" } : { id: "detail-title", tabindex: "-1" };
  return make("div", { class: "detail-head" },
    make("div", { class: "detail-top" },
      make("h2", title, pair.number ? make("span", { class: "number" }, String(pair.number)) : "", pair.name),
      still ? "" : make("div", { class: "buttons" },
        make("button", { type: "button", id: "previous", onclick: () => step(-1) }, "Previous"),
        make("button", { type: "button", id: "next", onclick: () => step(1) }, "Next"))),
    make("p", { class: "verdict-line" }, sign(pair.sign), ` ${VERDICT_WORDS[pair.verdict]}${pair.worst && pair.verdict === "flag" ? `, ${pair.worst}` : ""}`,
      make("span", null, ` · class ${pair.class || "none"}`), make("span", null, ` · routed: ${pair.routed}`)),
    make("dl", { class: "facts" },
      fact([sample("leg-sample plus"), " plus"], detail.nets.plus.join(", then ") || pair.plus),
      fact([sample("leg-sample minus"), " minus"], detail.nets.minus.join(", then ") || pair.minus),
      fact("from, to", `${source || "unknown"} to ${load || "unknown"}`),
      series ? fact("in series", series) : "",
      fact("found by", detail.foundBy + (lines ? `; ${lines}` : ""))));
}

function fact(title, text) { return make("div", null, make("dt", null, title), make("dd", null, text)); }

// The picture.

function pairPicture(pair, drawing, { still, width }) {
  const [, , w, h] = drawing.box;
  const height = Math.round(Math.min(Math.max((width * h) / w, 240), still ? 300 : 460));
  const view = new Picture({
    label: `${pair.name} from above: plus blue and solid, minus orange and dashed. Arrow keys move, plus and minus zoom, zero shows all.`,
    extent: drawing.box, height, still, width, told: (scale) => settlePins(scale),
  });
  const legLayers = new Set(drawing.legs.flat().map(([layer]) => layer));
  const layers = [...new Set([...drawing.copper.map((one) => one[0]), ...drawing.openings.map((one) => one[0]), ...legLayers])].sort((a, b) => b - a);
  // A layer without any reference copper is one great opening, which would cover all else; it is there to be ticked.
  const hidden = new Set(layers.filter((layer) => !legLayers.has(layer) && !drawing.copper.some((one) => one[0] === layer && one[1] === "reference")));
  const groups = new Map(layers.map((layer) => [layer, shape("g", { "data-layer": layer })]));
  const dashes = `hatch-${still ? "p" : "s"}${pair.index}`;
  view.body.append(shape("defs", null, shape("pattern", { id: dashes, width: 300, height: 300, patternUnits: "userSpaceOnUse", patternTransform: "rotate(45)" },
    shape("path", { class: "hatch", d: "M0 0V300", "stroke-width": 90 }))));
  // Reference copper and its openings lie behind all, so that the legs are seen on whatever layer they run.
  for (const [layer, role, net, path] of drawing.copper) {
    if (role === "reference") view.body.append(shape("path", { class: "copper reference", d: path, "data-layer": layer, "fill-rule": "evenodd" }, shape("title", null, `reference ${drawing.nets[net]} on ${board.layers[layer]}`)));
  }
  for (const [layer, , path] of drawing.openings) {
    view.body.append(shape("path", { class: "opening", d: path, "data-layer": layer, "fill-rule": "evenodd", fill: `url(#${dashes})` }, shape("title", null, `no reference copper on ${board.layers[layer]}`)));
  }
  for (const role of ["neighbour", "minus", "plus"]) {
    for (const [layer, own, net, path] of drawing.copper) {
      if (own === role) groups.get(layer).append(shape("path", { class: `copper ${role}`, d: path, "fill-rule": "evenodd" }, shape("title", null, `${role} ${drawing.nets[net] || "(no net)"} on ${board.layers[layer]}`)));
    }
  }
  for (const layer of layers) view.body.append(groups.get(layer));
  const lines = shape("g");
  drawing.legs.forEach((leg, index) => {
    for (const [layer, , path] of leg) lines.append(shape("path", { class: `centre ${index ? "minus" : "plus"}`, d: path, "data-layer": layer }));
  });
  view.body.append(lines);
  for (const part of drawing.parts) {
    const group = shape("g", { class: "part" });
    for (const [pinName, net, leg, layer, , , path] of part.pads) {
      group.append(shape("path", { class: `pad ${leg}`, d: path, "data-layer": layer < 0 ? null : layer }, shape("title", null, `${part.ref} pin ${pinName}: ${drawing.nets[net] || "no net"}`)));
    }
    if (part.outline) group.append(shape("path", { class: "part-edge", d: part.outline }));
    view.body.append(group);
  }
  for (const [x, y, , , padSize, drill, net, role, used] of drawing.vias) {
    view.body.append(shape("g", { class: `via ${role}${used ? " used" : ""}` },
      shape("circle", { class: "via-pad", cx: x, cy: y, r: Math.max(padSize / 2, 100) }), shape("circle", { class: "via-hole", cx: x, cy: y, r: Math.max(drill / 2, 50) }),
      shape("title", null, `via of ${drawing.nets[net] || "no net"}`)));
  }
  const labels = [];
  const label = (text, x, y, kind) => { const element = shape("text", { class: `label ${kind}` }, text); labels.push([element, x, y]); view.marks.append(element); };
  for (const part of drawing.parts) if (part.at) label(part.ref, part.at[0], part.at[1], "part-label");
  drawing.ends.forEach((both, leg) => both.forEach(([x, y]) => label(leg ? "−" : "+", x, y, leg ? "minus" : "plus")));
  const pins = drawing.places.filter(([number]) => pair.findings[number - 1] && !pair.findings[number - 1].waived)
    .map(([number, , x, y]) => ({ element: pin(pair.findings[number - 1].severity, letter(number - 1)), x, y, number }));
  const spot = shape("g", { class: "spot hidden" }, shape("circle", { r: 9 }), shape("path", { d: "M-14 0H14M0-14V14" }));
  view.marks.append(...pins.map((one) => one.element), spot);
  let at = null;
  function settlePins(scale) {
    for (const [element, x, y] of labels) element.setAttribute("transform", `translate(${x} ${y}) scale(${scale})`);
    settle(pins, scale);
    if (at) spot.setAttribute("transform", `translate(${at.x} ${at.y}) scale(${scale})`);
  }
  view.mark = (place) => {
    at = place;
    spot.classList.toggle("hidden", !place);
    if (place) spot.setAttribute("transform", `translate(${place.x} ${place.y}) scale(${view.scale})`);
  };
  const show = () => {
    for (const one of view.body.querySelectorAll("[data-layer]")) one.classList.toggle("hidden", hidden.has(Number(one.dataset.layer)));
  };
  show();
  const choice = still ? make("p", { class: "small" }, `Layers shown: ${layers.filter((layer) => !hidden.has(layer)).sort((a, b) => a - b).map((layer) => board.layers[layer]).join(", ")}`)
    : make("fieldset", { class: "layers" }, make("legend", null, "Layers shown"), [...layers].reverse().map((layer) => make("label", { class: "tick" },
      make("input", { type: "checkbox", name: "pair-layer", value: layer, checked: !hidden.has(layer), onchange: (event) => { hidden[event.target.checked ? "delete" : "add"](layer); show(); } }),
      ` ${board.layers[layer]}`)));
  const legend = make("div", { class: "legend" },
    make("span", null, sample("leg-sample plus"), " plus, solid"), make("span", null, sample("leg-sample minus"), " minus, dashed"),
    make("span", null, make("span", { class: "key neighbour", "aria-hidden": "true" }), " neighbours"),
    make("span", null, make("span", { class: "key reference", "aria-hidden": "true" }), " reference copper"),
    drawing.openings.length ? make("span", null, make("span", { class: "key opening", "aria-hidden": "true" }), " opening in it") : "",
    pins.length ? make("span", null, "letters: places of the findings below") : "",
    drawing.unknown.length ? make("span", null, "reference copper beside the legs is not known on every layer") : "");
  view.whole = make("div", { class: "pair-picture" }, choice, view.element, legend);
  if (still) view.tell();
  return view;
}

// The findings with what to decide about them.

function findingsOf(pair, shown) {
  const groups = standingByRule(pair);
  const waived = pair.findings.filter((finding) => finding.waived);
  if (!groups.length && !waived.length) return null;
  return make("section", { class: "findings" }, make("h3", null, "Findings"),
    groups.map((group) => make("article", { class: "finding" }, group.findings.map(({ finding, index }) => findingOf(finding, index, shown)),
      shown.still ? decisionWords(group) : decisionForm(pair, group), shown.still ? "" : ruleHelp(group.rule))),
    waived.map((finding) => make("article", { class: "finding" }, make("p", null, sign("waived"), make("strong", null, ` waived: ${finding.rule}. `), finding.message))));
}

function findingOf(finding, index, shown) {
  const places = finding.at.map(([layer, text, x, y]) => {
    const words = `${layer} ${text}`.trim();
    if (shown.still || !shown.picture) return make("li", null, words);
    return make("li", null, make("button", { type: "button", class: "link", title: "show in the picture", onclick: () => {
      shown.picture.goTo(x, y, 6000);
      shown.picture.mark({ x, y });
      shown.picture.whole.scrollIntoView({ block: "nearest" });
    } }, words));
  });
  const margin = finding.measured !== null && finding.limit !== null
    ? make("p", { class: "margin" }, make("span", null, "measured ", make("b", null, amount(finding.measured, finding.unit))), make("span", null, "limit ", make("b", null, amount(finding.limit, finding.unit))),
      make("span", null, "beyond it by ", make("b", null, amount(Math.abs(finding.measured - finding.limit), finding.unit)))) : "";
  return make("div", { class: "finding-body" },
    make("h4", null, make("span", { class: "letter" }, letter(index)), sign(finding.severity), ` ${finding.severity}: ${finding.rule}`),
    make("p", null, finding.message), margin,
    places.length ? make("div", { class: "places" }, "At ", make("ul", null, places)) : "",
    finding.advice ? make("p", { class: "advice" }, make("b", null, "To do: "), finding.advice) : "",
    finding.source ? make("p", { class: "small" }, `Limit from: ${finding.source}`) : "");
}

function amount(value, unit) {
  const [scaled, named] = unit === "F" ? [value * 1e12, "pF"] : [value, shownUnit(unit)];
  return `${figure(scaled)}${named ? ` ${named}` : ""}`;
}

function decisionForm(pair, group) {
  const now = kept.decisions[group.key] || { choice: "", text: "", who: "", until: "" };
  const name = `decision-${pair.index}-${group.rule}`;
  const fields = make("div", { class: "decision-fields" });
  const asked = { mend: "Remark", accept: "Reason", ask: "Question" };
  const lack = make("p", { class: "lack", role: "status" });
  const tell = () => {
    const decision = kept.decisions[group.key];
    const missing = decision && decision.choice === "accept" ? lackOf(decision) : [];
    lack.textContent = missing.length ? `To be saved as a waiver it still needs ${missing.join(", ")}.` : "";
  };
  const change = (what) => { decide(pair, group.first, what); tell(); };
  const build = () => {
    const decision = kept.decisions[group.key];
    fields.replaceChildren();
    if (decision) {
      const field = (words, attributes) => make("label", null, `${words} `, make("input", attributes));
      fields.append(field(asked[decision.choice], { name: `${name}-text`, value: decision.text, class: "wide", autocomplete: "off", oninput: (event) => change({ text: event.target.value }) }));
      if (decision.choice === "accept") {
        fields.append(field("Who", { name: `${name}-who`, value: decision.who, autocomplete: "off", oninput: (event) => change({ who: event.target.value }) }),
          field("Until", { name: `${name}-until`, type: "date", value: decision.until, oninput: (event) => change({ until: event.target.value }) }));
      }
    }
    tell();
  };
  const radio = (value, word) => make("label", { class: "tick" }, make("input", {
    type: "radio", name, value, checked: now.choice === value,
    onchange: () => {
      const before = kept.decisions[group.key];
      change({ choice: value, who: before && before.who ? before.who : kept.who });
      build();
    },
  }), ` ${word}`);
  build();
  const several = group.findings.length > 1 ? `Decision on all ${group.findings.length} places of ${group.rule}` : `Decision on ${group.rule}`;
  return make("fieldset", { class: "decision" }, make("legend", null, several), make("div", { class: "choices" }, radio("", "open"), CHOICES.map(([value, word]) => radio(value, word))), fields, lack);
}

function decisionWords(group) {
  const decision = kept.decisions[group.key];
  if (!decision) return make("p", { class: "on-paper" }, "Decision:  ☐ mend   ☐ accept   ☐ ask");
  const word = (CHOICES.find(([choice]) => choice === decision.choice) || ["", ""])[1];
  const more = [decision.text, decision.choice === "accept" && decision.who && `by ${decision.who}`, decision.choice === "accept" && decision.until && `until ${decision.until}`].filter(Boolean);
  return make("p", { class: "on-paper" }, `Decision: ${word}${more.length ? `: ${more.join(", ")}` : ""}`);
}

function ruleHelp(name) {
  const rule = board.rules.find((one) => one.name === name);
  if (!rule) return "";
  return make("details", { class: "help" }, make("summary", null, `What ${name} judges, and why`),
    make("dl", null, rule.help.map(([title, text]) => [make("dt", null, title), make("dd", null, text)])));
}

// Along the route and over frequency.

function alongRoute(pair, detail, shown, width) {
  const drawing = detail.drawing;
  let slider = null;
  const said = make("output", { class: "along-said" });
  const go = (x) => {
    const place = placeAt(drawing, x);
    const section = stretchAt(drawing.impedance.filter((one) => one[0] === "both"), x, 2, 3);
    const running = place && differenceAt(drawing.difference, place);
    charts.forEach((one) => one.cursor(one.dataset.kind === "difference" ? (running ? running.along : NaN) : x));
    shown.picture.mark(place);
    const parts = [`at ${figure(x, 2)} mm`];
    if (place) parts.push(`${board.layers[place.layer]} ${coordinates(place.x, place.y)}`, place.gap === null ? "the other leg is not beside it" : `gap ${figure(place.gap)} mm`);
    if (section && section[6] !== null) parts.push(`${figure(section[6], 1)} ohm`);
    if (running) parts.push(`difference ${figure(running.difference)} mm`);
    said.textContent = parts.join(", ");
  };
  const onPoint = shown.still ? null : (x) => { slider.value = x; go(x); };
  const charts = curvesAlong(drawing, width, onPoint, shown.still ? 150 : 190);
  charts.forEach((one) => { one.dataset.kind = one.textContent.startsWith("Running") ? "difference" : "place"; });
  const missing = drawing.missing.length ? make("ul", { class: "small" }, drawing.missing.map((text) => make("li", null, text))) : "";
  if (!charts.length) return make("section", { class: "along" }, make("h3", null, "Along the route"), make("p", null, "Nothing can be drawn along the route."), missing);
  const stretches = drawing.spacing;
  const length = stretches.length ? stretches[stretches.length - 1][1] : 0;
  if (!shown.still && length) {
    slider = make("input", { type: "range", min: 0, max: length, step: length / 500, value: 0, id: "along", oninput: (event) => go(Number(event.target.value)) });
  }
  return make("section", { class: "along" }, make("h3", null, "Along the route, from source to load"),
    slider ? make("p", { class: "slide" }, make("label", { for: "along" }, "Place along plus"), slider, said) : "", charts, missing);
}

function overFrequency(detail, width, still) {
  const charts = detail.drawing ? curvesOverFrequency(detail.drawing, width, still ? 0.75 : 1) : [];
  const rows = detail.balance;
  if (!charts.length && !rows.length) return null;
  const columns = [["source", "source_db"], ["trace", "trace_db"], ["cable", "cable_db"], ["load", "load_db"], ["total", "total_db"], ["rejects", "rejection_db"]];
  return make("section", { class: "frequency" }, make("h3", null, "Conversion over frequency"), charts,
    rows.length ? make("table", { class: "balance" }, make("caption", null, "At the frequencies of the class, in dB; “?” is not modelled"),
      make("thead", null, make("tr", null, make("th", { scope: "col" }, "at"), columns.map(([word]) => make("th", { scope: "col" }, word)))),
      make("tbody", null, rows.map((row) => make("tr", null, make("th", { scope: "row" }, hertz(row.frequency_hz)),
        columns.map(([, key]) => make("td", null, row[key] === null ? "?" : row[key] < NOTHING_DB ? "none" : figure(row[key], 1))))))) : "");
}

// Figures beside limits, all figures, and what they rest on.

const OUTCOMES = { broken: "broken", kept: "kept", waived: "waived", undecided: "undecided" };

function limitsOf(detail, still) {
  if (!detail.limits.length) return null;
  const order = { broken: 0, undecided: 1, waived: 2, kept: 3 };
  const every = [...detail.limits].sort((a, b) => order[a.outcome] - order[b.outcome]);
  // On paper limits that hold without a figure to compare are only named.
  const named = every.filter((one) => still && one.outcome === "kept" && one.measured === null).map((one) => `${one.rule}${one.says ? ` (${one.says})` : ""}`);
  const rows = every.filter((one) => !(still && one.outcome === "kept" && one.measured === null));
  const kinds = { broken: null, kept: "pass", waived: "waived", undecided: "undecided" };
  return make("section", { class: "limits" }, make("h3", null, "Figures beside limits"), make("ul", { class: "limit-list" }, rows.map((one) => {
    const compared = one.measured !== null && one.limit !== null;
    const off = compared ? Math.abs(one.measured - one.limit) : 0;
    return make("li", null,
      make("span", { class: "limit-name" }, sign(kinds[one.outcome] || one.severity), ` ${one.rule}`, make("span", { class: "outcome" }, ` ${OUTCOMES[one.outcome]}`)),
      make("span", null, one.says || "no number"),
      make("span", null, compared ? `${amount(one.measured, one.unit)} against ${amount(one.limit, one.unit)}` : one.outcome === "undecided" ? "" : "no single figure"),
      make("span", { class: "limit-margin" }, compared ? `${one.outcome === "kept" ? "to spare" : "beyond"} ${amount(off, one.unit)}` : ""),
      one.missing ? make("span", { class: "limit-source" }, one.missing) : "",
      make("span", { class: "small limit-source" }, one.source ? `from: ${one.source}` : "no source given"));
  })), named.length ? make("p", { class: "small" }, `Kept as well: ${named.join("; ")}`) : "");
}

function figuresOf(detail) {
  return make("section", { class: "figures" }, make("h3", null, "All figures"), make("dl", { class: "figure-list" },
    detail.figures.map(([label, value, unit]) => make("div", null, make("dt", null, label), make("dd", null, value === "?" ? "unknown" : `${value.replace("-", "−")}${unit ? ` ${unit}` : ""}`)))));
}

function restsOn(detail, still) {
  const block = (title, texts) => (texts.length ? [make("h4", null, title), make("ul", null, texts.map((text) => make("li", null, text)))] : "");
  return make("section", { class: "rests" }, make("h3", null, "Model and assumptions"),
    still ? "" : block("Models, set out under “What this rests on”", board.models), block("Assumed beside what is given", detail.assumed),
    block("Not known", detail.missing), block("Rules that could not judge", detail.unjudged.map(([rule, missing]) => `${rule}: ${missing}`)));
}
