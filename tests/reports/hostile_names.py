"""Names that a hostile board file may hold, each with what it would do where a report let it."""

from __future__ import annotations

HOSTILE = {
    "runs in a page": "<script>alert(1)</script>",
    "breaks out of an attribute": '"onload="alert(1)',
    "breaks out of a single-quoted attribute": "'onload='alert(1)",
    "ends a CDATA section": "]]><x/>",
    "is an entity": "&lt;b&gt;&x;",
    "starts a formula": "=cmd|'/C calc'!A0",
    "starts a formula with a sign": "+1+cmd|' /C calc'!A0",
    "turns the line": "A\u202eP_N\u202c",
    "marks the direction": "A\u200f\u200eB",
    "moves the cursor": "A\x1b[2J\x1b]0;title\x07",
    "breaks the line": "A\nB\r\nC\u2028D",
    "ends a string": "A\x00B",
    "is no text": "A\ud800B",
    "is a link in markdown": "[x](https://buoy.invalid)",
    "is a bare link": "https://buoy.invalid www.buoy.invalid",
    "is an image": "![x](https://buoy.invalid/x.png)",
    "calls a person": "@tide-gauge-team",
    "calls an issue": "#1",
    "ends a table cell": "A | B | `C` | ~~D~~ **E** __F__",
    "ends folded details": "</summary></details><h1>",
    "is a placeholder": "{0} {1:x} %s %n ${jndi:x}",
    "is a path": "../../etc/passwd",
}
HIDDEN = ("\x1b", "\x07", "\x00", "\r", "\u2028", "\u202e", "\u202c", "\u200f", "\u200e", "\ud800")
"""What no report may hold, whatever its format."""
