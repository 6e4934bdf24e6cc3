// The decisions: one for each rule that a pair breaks, kept in this browser for this very board file.

const STORE = `pairrules-review:${board.sha256}`;
const CHOICES = [["mend", "mend"], ["accept", "accept as it is"], ["ask", "ask"]];
const kept = { works: true, who: "", decisions: {} };
const onDecision = [];

function readKept() {
  try {
    const text = localStorage.getItem(STORE);
    const found = text === null ? null : JSON.parse(text);
    if (found && typeof found.decisions === "object" && found.decisions !== null) {
      kept.who = String(found.who || "");
      for (const [key, one] of Object.entries(found.decisions)) {
        if (CHOICES.some(([choice]) => choice === one.choice)) {
          kept.decisions[key] = { choice: one.choice, text: String(one.text || ""), who: String(one.who || ""), until: String(one.until || "") };
        }
      }
    }
  } catch { kept.works = false; }
}

function writeKept() {
  try {
    localStorage.setItem(STORE, JSON.stringify({ who: kept.who, decisions: kept.decisions }));
  } catch { kept.works = false; }
  onDecision.forEach((tell) => tell());
}

function nameOf(pair) { return pair.key === undefined ? pair.name : pair.key; }

// When the copper of the pair changes, so does the fingerprint, and the decision must be made anew.
function keyOf(pair, finding) { return JSON.stringify([nameOf(pair), finding.rule, finding.print]); }

function decide(pair, finding, change) {
  const key = keyOf(pair, finding);
  const now = kept.decisions[key] || { choice: "", text: "", who: kept.who, until: "" };
  const next = { ...now, ...change };
  if (next.choice) kept.decisions[key] = next;
  else delete kept.decisions[key];
  if (change.who) kept.who = change.who;
  writeKept();
}

// Findings that still stand, gathered by rule: a decision and a waiver hold for all of one rule on one pair.
function standingByRule(pair) {
  const groups = new Map();
  pair.findings.forEach((finding, index) => {
    if (finding.waived) return;
    if (!groups.has(finding.rule)) groups.set(finding.rule, { key: keyOf(pair, finding), rule: finding.rule, first: finding, findings: [] });
    groups.get(finding.rule).findings.push({ finding, index });
  });
  return [...groups.values()];
}

const DAY = /^\d{4}-(0[1-9]|1[0-2])-(0[1-9]|[12]\d|3[01])$/;

// What an accepted finding lacks before it can be saved as a waiver.
function lackOf(decision) {
  const lack = [];
  if (!decision.text.trim()) lack.push("a reason");
  if (!decision.who.trim()) lack.push("who accepts it");
  if (!DAY.test(decision.until)) lack.push("until when");
  return lack;
}

readKept();
