// What is handed on: the waivers that pairrules reads, and a task list in plain words for the layout person.

// A text as YAML 1.2 in double quotes. Escapes are those of section 5.7; beyond ASCII only what moves or hides is escaped.
function quoted(text) {
  let out = "";
  for (const character of text) {
    const code = character.codePointAt(0);
    if (character === '"' || character === "\\") out += `\\${character}`;
    else if (code < 0x20 || (code >= 0x7f && code < 0xa0)) out += `\\x${code.toString(16).padStart(2, "0")}`;
    else if (/[\p{Cf}\p{Cs}\p{Co}\p{Cn}\p{Zl}\p{Zp}]/u.test(character)) {
      out += code > 0xffff ? `\\U${code.toString(16).padStart(8, "0")}` : `\\u${code.toString(16).padStart(4, "0")}`;
    } else out += character;
  }
  return `"${out}"`;
}

function everyDecision() {
  return pairs.flatMap((pair) => standingByRule(pair)
    .map((group) => ({ pair, group, decision: kept.decisions[group.key] }))
    .filter((one) => one.decision));
}

// Waivers of the project's own file that are still of use stay in the new one; `pairrules` reads but one for a rule on a pair.
function keptWaivers(renewed) {
  return board.waivers.filter((one) => ["held", "undecided"].includes(one.state) && !renewed.has(JSON.stringify([one.rule, one.pair])));
}

function waivers() {
  const accepted = everyDecision().filter((one) => one.decision.choice === "accept");
  const whole = accepted.filter((one) => !lackOf(one.decision).length).map(({ pair, group, decision }) => ({
    rule: group.rule, pair: nameOf(pair), reason: decision.text.trim(), who: decision.who.trim(), until: decision.until, fingerprint: group.first.print,
  }));
  const before = keptWaivers(new Set(whole.map((one) => JSON.stringify([one.rule, one.pair]))));
  const lines = [`# Findings accepted as they are, from the review of ${quoted(board.file)}`];
  for (const one of [...before, ...whole]) {
    lines.push(`- rule: ${quoted(one.rule)}`, `  pair: ${quoted(one.pair)}`, `  reason: ${quoted(one.reason)}`);
    if (one.who) lines.push(`  who: ${quoted(one.who)}`);
    lines.push(`  until: ${one.until}`, `  fingerprint: ${quoted(one.fingerprint)}`);
  }
  if (lines.length === 1) lines.push("[]");
  return { text: `${lines.join("\n")}\n`, count: whole.length, before: before.length, short: accepted.filter((one) => lackOf(one.decision).length) };
}

function tasks() {
  const lines = [`Tasks from the review of ${board.file} (${board.name})`, ""];
  let count = 0;
  for (const [choice, title] of [["mend", "To mend"], ["ask", "To ask"]]) {
    const chosen = everyDecision().filter((one) => one.decision.choice === choice);
    if (!chosen.length) continue;
    lines.push(title, "");
    for (const { pair, group, decision } of chosen) {
      for (const { finding } of group.findings) {
        count += 1;
        const where = finding.at.length ? finding.at.map(([layer, at]) => `${layer} ${at}`.trim()).join("; ")
          : `no single place; layers ${pair.layers.map((layer) => board.layers[layer]).join(", ") || "unknown"}`;
        lines.push(`${count}. ${pair.name} (${pair.plus} and ${pair.minus}): ${finding.rule}`, `   found: ${finding.message}`, `   where: ${where}`);
        if (finding.advice) lines.push(`   to do: ${finding.advice}`);
        if (decision.text.trim()) lines.push(`   ${choice === "ask" ? "question" : "remark"}: ${decision.text.trim().replace(/\s+/g, " ")}`);
        lines.push("");
      }
    }
  }
  return { text: `${lines.join("\n").trimEnd()}\n`, count };
}

function saveFile(name, text) {
  const address = URL.createObjectURL(new Blob([text], { type: "text/plain;charset=utf-8" }));
  const link = make("a", { href: address, download: name });
  document.body.append(link);
  link.click();
  link.remove();
  setTimeout(() => URL.revokeObjectURL(address), 10000);
}

function drawSave() {
  const every = pairs.flatMap((pair) => standingByRule(pair));
  const open = every.filter((group) => !kept.decisions[group.key]).length;
  const ready = waivers();
  const list = tasks();
  const short = ready.short.map(({ pair, group, decision }) => make("li", null,
    make("button", { type: "button", class: "link", onclick: () => choosePair(pair, { scroll: true }) }, `${pair.name}, ${group.rule}`),
    ` lacks ${lackOf(decision).join(", ")}`));
  byId("save-body").replaceChildren(
    kept.works ? "" : make("p", { class: "warning" }, "This browser keeps nothing for this page. Save the decisions before you close it."),
    make("p", null, `${every.length - open} of ${counted(every.length, "finding")} decided, ${open} open. Decisions stay in this browser, for this board file alone.`),
    make("div", { class: "buttons" },
      make("button", { type: "button", id: "save-waivers", onclick: () => saveFile("pairrules-waivers.yaml", waivers().text) },
        `Save decisions: ${counted(ready.count, "waiver")}`),
      make("button", { type: "button", id: "save-tasks", onclick: () => saveFile("pairrules-tasks.txt", tasks().text) },
        `Save the task list: ${counted(list.count, "task")}`)),
    make("p", { class: "small" }, "Put ", make("code", null, "pairrules-waivers.yaml"), " beside the settings, or beside the board where there are none, in place of an older one. ",
      board.waivers.length ? `Of ${counted(board.waivers.length, "waiver")} there already, ${ready.before} still of use stay in it.` : ""),
    short.length ? make("div", { class: "warning" }, make("p", null, "Accepted, but not yet saved:"), make("ul", null, short)) : "");
}
