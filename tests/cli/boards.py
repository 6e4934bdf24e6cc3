"""Board and settings files for whole runs of the command line."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

PADS = {"shape": "rect", "size": [0.8, 0.4]}
LIMITS = "extends: []\nlimits:\n  leg-length: {most: 0.5 mm, severity: review, source: 'this test'}\n"


def board(bump: float = 0.0, **more: Any) -> dict[str, Any]:
    """Two pairs: IN, whose plus leg has a bump that makes it twice `bump` longer, and the straight OK."""
    nets = {"IN_P": (0.0, bump), "IN_N": (0.5, 0.0), "OK_P": (5.0, 0.0), "OK_N": (5.5, 0.0)}
    parts = [
        {
            "ref": ref,
            "pins": [
                {"pin": str(n + 1), "net": net, "at": [x, y], "layer": "TOP", "pad": PADS}
                for n, (net, (y, _)) in enumerate(nets.items())
            ],
        }
        for ref, x in (("J1", 0), ("U1", 20))
    ]
    tracks = [
        {
            "net": net,
            "layer": "TOP",
            "width": 0.2,
            "points": [[0, y], [10, y], [10, y - high], [12, y - high], [12, y], [20, y]]
            if high
            else [[0, y], [20, y]],
        }
        for net, (y, high) in nets.items()
    ]
    plain = {
        "pairrules_board": 1,
        "name": "tide gauge",
        "units": "mm",
        "stackup": [
            {"name": "TOP", "kind": "copper", "thickness": 0.035},
            {"name": "D1", "kind": "dielectric", "thickness": 0.2, "permittivity": 4.2, "loss_tangent": 0.02},
            {"name": "GND", "kind": "copper", "thickness": 0.035},
        ],
        "parts": parts,
        "tracks": tracks,
    }
    return plain | more


def put(folder: Path, name: str = "buoy.json", *, bump: float = 0.0, **more: Any) -> Path:
    """A board file in a folder."""
    path = folder / name
    path.write_text(json.dumps(board(bump, **more)), encoding="utf-8")
    return path


def limits(folder: Path, text: str = LIMITS) -> Path:
    """A settings file in a folder, under the name that is found by itself."""
    path = folder / "pairrules.yaml"
    path.write_text(text, encoding="utf-8")
    return path
