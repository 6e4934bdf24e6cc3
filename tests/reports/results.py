"""Results made in code, for the tests of reports."""

from __future__ import annotations

from typing import Any

from pairrules.result import BoardSummary, Finding, Measures, PairResult, Place, Result, SeriesPart, Unjudged


def finding(**more: Any) -> Finding:
    plain: dict[str, Any] = {
        "rule": "leg-length",
        "severity": "review",
        "measured": 1.1,
        "limit": 0.5,
        "unit": "mm",
        "message": "plus is 1.10 mm longer than minus; 0.50 mm is allowed",
        "advice": "add 1.10 mm to minus",
        "at": (Place(layer="TOP", x_mm=12.7, y_mm=25.4),),
        "source": "common practice, no source",
        "fingerprint": "0f",
    }
    return Finding(**(plain | more))


def pair(name: str = "IN", *, verdict: str = "pass", **more: Any) -> PairResult:
    plain: dict[str, Any] = {
        "name": name,
        "plus": f"{name}_P",
        "minus": f"{name}_N",
        "klass": "sensor",
        "found_by": "net name",
        "nets_plus": (f"{name}_P",),
        "nets_minus": (f"{name}_N",),
        "source": "J1",
        "load": "U1",
        "series": (SeriesPart(ref="C1", value="100n", leg="plus"),),
        "routed": "complete",
        "verdict": verdict,
        "measures": Measures(length_plus_mm=41.2, length_minus_mm=40.1, length_mismatch_mm=1.1, vias_plus=1),
    }
    return PairResult(**(plain | more))


def result(*pairs: PairResult, **board: Any) -> Result:
    plain: dict[str, Any] = {
        "file": "buoy.json",
        "sha256": "ab" * 32,
        "format": "plain JSON",
        "revision": "1",
        "units": "mm",
        "name": "tide gauge",
        "complete": True,
        "missing": (),
    }
    unpaired = board.pop("unpaired", ())
    return Result(version="0.1.0", board=BoardSummary(**(plain | board)), pairs=pairs, unpaired=unpaired)


def undecided(name: str = "LOST") -> PairResult:
    return pair(
        name,
        verdict="undecided",
        routed="partial",
        unjudged=(
            Unjudged(rule="gap-band", missing="minus cannot be followed from end to end"),
            Unjudged(rule="leg-length", missing="minus cannot be followed from end to end"),
        ),
    )
