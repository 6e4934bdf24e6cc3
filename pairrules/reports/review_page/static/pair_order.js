// Which pairs are listed, and moving among them.

const wanted = { verdicts: new Set(["flag"]), klass: "", rule: "", layer: "", decision: "", text: "" };
let listed = [];
let chosen = null;
const onListed = [];
const onChosen = [];

function words(pair) {
  pair.words = pair.words || [pair.name, pair.plus, pair.minus, pair.class,
    ...pair.findings.flatMap((finding) => [finding.rule, finding.message, finding.advice, ...finding.at.map(([layer, at]) => `${layer} ${at}`)])]
    .join("\n").toLowerCase();
  return pair.words;
}

function onLayer(pair, layer) {
  return pair.layers.some((one) => board.layers[one] === layer) || pair.findings.some((finding) => finding.at.some(([one]) => one === layer));
}

function fits(pair) {
  if (!wanted.verdicts.has(pair.verdict)) return false;
  if (wanted.klass && pair.class !== (wanted.klass === "\n" ? "" : wanted.klass)) return false;
  if (wanted.rule && !pair.findings.some((finding) => finding.rule === wanted.rule)) return false;
  if (wanted.layer && !onLayer(pair, wanted.layer)) return false;
  if (wanted.decision) {
    const choices = standingByRule(pair).map((group) => (kept.decisions[group.key] || { choice: "open" }).choice);
    if (!choices.includes(wanted.decision)) return false;
  }
  return wanted.text.toLowerCase().split(/\s+/).every((word) => words(pair).includes(word));
}

function relist() {
  listed = pairs.filter(fits);
  const count = wanted.verdicts.size ? `${listed.length} of ${counted(pairs.length, "pair")} listed` : "no verdict is ticked, so no pair is listed";
  byId("listed").textContent = count;
  byId("list").replaceChildren(...listed.map(item));
  onListed.forEach((tell) => tell());
}

function item(pair) {
  const groups = standingByRule(pair);
  const decided = groups.filter((group) => kept.decisions[group.key]).length;
  const rules = groups.map((group) => group.rule).join(", ");
  const said = [rules, pair.class ? `class ${pair.class}` : "no class"].filter(Boolean).join(" · ");
  return make("li", null, make("button", {
    type: "button", id: `item-${pair.index}`, class: "item", "aria-current": pair === chosen ? "true" : null,
    tabindex: pair === (listed.includes(chosen) ? chosen : listed[0]) ? "0" : "-1",
    onclick: () => choosePair(pair, { scroll: true }),
  },
  make("span", { class: "item-number" }, pair.number ? String(pair.number) : ""),
  sign(pair.sign),
  make("span", { class: "item-name" }, pair.name, " ", make("span", { class: "item-word" }, pair.worst || VERDICT_WORDS[pair.verdict])),
  make("span", { class: "item-decided" }, groups.length ? `${decided}/${groups.length} decided` : ""),
  make("span", { class: "item-rules" }, said)));
}

function choosePair(pair, { scroll = false, focus = false, keepAddress = false } = {}) {
  const before = chosen;
  chosen = pair;
  for (const one of [before, pair]) {
    const button = one && byId(`item-${one.index}`);
    if (button) {
      button.toggleAttribute("aria-current", one === pair);
      if (one === pair) button.setAttribute("aria-current", "true");
      button.tabIndex = one === pair ? 0 : -1;
    }
  }
  if (!keepAddress) {
    const address = pair ? `#pair=${encodeURIComponent(wellFormed(pair.name))}` : "#";
    try { history.replaceState(null, "", address); } catch { /* Some browsers forbid it for files on disk. */ }
  }
  onChosen.forEach((tell) => tell(pair));
  if (pair && (scroll || focus)) {
    const title = byId("detail-title");
    if (focus || scroll) title.focus({ preventScroll: true });
    if (scroll) byId("detail").scrollIntoView({ block: "start" });
  }
  const button = pair && byId(`item-${pair.index}`);
  if (button && !scroll) button.scrollIntoView({ block: "nearest" });
}

function wellFormed(text) { return typeof text.toWellFormed === "function" ? text.toWellFormed() : text; }

function step(by) {
  if (!listed.length) return;
  const at = listed.indexOf(chosen);
  choosePair(listed[at < 0 ? 0 : Math.min(Math.max(at + by, 0), listed.length - 1)], { scroll: true });
}

function choosers(entries, name, title, none) {
  return make("label", null, title, " ", make("select", { name, id: `filter-${name}`, onchange: (event) => { wanted[name] = event.target.value; relist(); } },
    make("option", { value: "" }, none),
    entries.map(([value, text]) => make("option", { value }, text))));
}

function sorted(values) { return [...new Set(values)].sort((a, b) => a.localeCompare(b, "en")); }

function drawFilter() {
  const count = (verdict) => pairs.filter((pair) => pair.verdict === verdict).length;
  if (!count("flag")) VERDICTS.forEach(([verdict]) => wanted.verdicts.add(verdict));
  const verdicts = make("fieldset", { class: "verdicts" }, make("legend", null, "Verdict"),
    VERDICTS.map(([verdict, word]) => make("label", { class: "tick" },
      make("input", {
        type: "checkbox", name: "verdict", value: verdict, checked: wanted.verdicts.has(verdict),
        onchange: (event) => { wanted.verdicts[event.target.checked ? "add" : "delete"](verdict); relist(); },
      }), sign(verdict === "flag" ? "review" : verdict), ` ${word} ${count(verdict)}`)));
  const classes = sorted(pairs.map((pair) => pair.class)).map((name) => [name || "\n", name || "(no class)"]);
  const rules = sorted(pairs.flatMap((pair) => pair.findings.map((finding) => finding.rule))).map((name) => [name, name]);
  const layers = board.layers.filter((layer) => pairs.some((pair) => onLayer(pair, layer))).map((name) => [name, name]);
  byId("filter").append(verdicts,
    make("div", { class: "choosers" },
      choosers(classes, "klass", "Class", "all classes"),
      choosers(rules, "rule", "Rule", "all rules"),
      choosers(layers, "layer", "Layer", "all layers"),
      choosers([["open", "not decided"], ...CHOICES], "decision", "Decision", "any decision")),
    make("label", { class: "search" }, "Text ", make("input", {
      type: "search", id: "filter-text", autocomplete: "off", spellcheck: "false",
      oninput: (event) => { wanted.text = event.target.value; relist(); },
    })));
  byId("filter").addEventListener("submit", (event) => event.preventDefault());
  byId("list").addEventListener("keydown", moveInList);
}

function moveInList(event) {
  const buttons = [...byId("list").querySelectorAll("button")];
  const at = buttons.indexOf(document.activeElement);
  const to = { ArrowDown: at + 1, ArrowUp: at - 1, Home: 0, End: buttons.length - 1 }[event.key];
  if (to === undefined || at < 0 || event.ctrlKey || event.altKey || event.metaKey) return;
  event.preventDefault();
  const next = buttons[Math.min(Math.max(to, 0), buttons.length - 1)];
  buttons.forEach((button) => { button.tabIndex = button === next ? 0 : -1; });
  next.focus();
}

// Signs of decisions in the list follow without drawing it anew, which would take the focus away.
function redecide() {
  for (const pair of listed) {
    const place = byId(`item-${pair.index}`)?.querySelector(".item-decided");
    const groups = standingByRule(pair);
    if (place && groups.length) place.textContent = `${groups.filter((group) => kept.decisions[group.key]).length}/${groups.length} decided`;
  }
}
