"""The circuit simulator ngspice (alternating-current analysis) as an independent judge of whole links.

Lone legs are its lossless lines; coupled sections are ladders of 200 short steps, whose own error (βl/200)²/24 is far
below the tolerance.
"""

from __future__ import annotations

import re
import shutil
import subprocess
from pathlib import Path

import numpy as np
import pytest

from pairrules.balance.conversion import decibel, solve
from pairrules.balance.networks import Element, Line, Series, Shunt

NGSPICE = shutil.which("ngspice")
pytestmark = pytest.mark.skipif(NGSPICE is None, reason="ngspice is not installed")

STEPS = 200
FREQUENCIES = (50.0, 1e3, 1e5, 1e7, 1e8)


class Netlist:
    """Grows a circuit from source to load; `p`, `n` are the legs' present nodes."""

    def __init__(self, plus: str, minus: str) -> None:
        self.lines = ["pair", f"Vp ep 0 DC 0 AC {plus}", f"Vn en 0 DC 0 AC {minus}"]
        self.p, self.n, self.count = "ep", "en", 0

    def add(self, kind: str, *nodes: str, value: object) -> str:
        self.count += 1
        self.lines.append(f"{kind}{self.count} {' '.join(nodes)} {value}")
        return f"{kind}{self.count}"

    def series(self, kind: str, plus: float, minus: float) -> tuple[str, str]:
        self.count += 1
        p, n = f"p{self.count}", f"n{self.count}"
        names = self.add(kind, self.p, p, value=f"{plus:.16g}"), self.add(kind, self.n, n, value=f"{minus:.16g}")
        self.p, self.n = p, n
        return names

    def shunt(self, kind: str, plus: float, minus: float, across: float | None) -> None:
        for node, value in ((self.p, plus), (self.n, minus)):
            self.add(kind, node, "0", value=f"{value:.16g}")
        if across is not None:
            self.add(kind, self.p, self.n, value=f"{across:.16g}")

    def lone(self, z: float, plus_s: float, minus_s: float) -> None:
        self.count += 1
        p, n = f"p{self.count}", f"n{self.count}"
        self.add("T", self.p, "0", p, "0", value=f"Z0={z:.16g} TD={plus_s:.16g}")
        self.add("T", self.n, "0", n, "0", value=f"Z0={z:.16g} TD={minus_s:.16g}")
        self.p, self.n = p, n

    def ladder(self, L: np.ndarray, C: np.ndarray, R: np.ndarray, length: float) -> None:
        step = length / STEPS
        k = L[0, 1] / np.sqrt(L[0, 0] * L[1, 1])
        c_plus, c_minus, between = C[0, 0] + C[0, 1], C[1, 1] + C[0, 1], -C[0, 1]
        for i in range(STEPS + 1):
            part = step / 2 if i in (0, STEPS) else step
            self.shunt("C", c_plus * part, c_minus * part, between * part)
            if i < STEPS:
                self.series("R", R[0, 0] * step, R[1, 1] * step)
                coils = self.series("L", L[0, 0] * step, L[1, 1] * step)
                self.add("K", *coils, value=f"{k:.16g}")

    def run(self, folder: Path) -> np.ndarray:
        """Complex V_plus − V_minus at each frequency."""
        control = [".control", "set numdgt=15"]
        for frequency in FREQUENCIES:
            control += [f"ac lin 1 {frequency:g} {frequency:g}", "print vr(d) vi(d)"]
        text = [*self.lines, f"Ed d 0 {self.p} {self.n} 1", "Rd d 0 1", *control, "quit", ".endc", ".end"]
        file = folder / "pair.cir"
        file.write_text("\n".join(text) + "\n")
        assert NGSPICE is not None
        said = subprocess.run([NGSPICE, "-b", str(file)], capture_output=True, text=True, check=True).stdout
        numbers = [float(found) for found in re.findall(r"v[ri]\(d\) = (\S+)", said)]
        assert len(numbers) == 2 * len(FREQUENCIES), said
        return np.array(numbers[::2]) + 1j * np.array(numbers[1::2])


L = np.array([[3.18e-7, 6.6e-8], [6.6e-8, 3.3e-7]])
C = np.array([[1.08e-10, -1.1e-11], [-1.1e-11, 1.0e-10]])
R = np.diag([2.2, 1.8])
DELAY, Z = 6.55e-9, 50.4


def build(plus: str, minus: str) -> Netlist:
    net = Netlist(plus, minus)
    net.series("R", 1000.0, 1010.0)
    net.ladder(L, C, R, 0.3)
    net.lone(Z, 0.1 * DELAY, 0.103 * DELAY)
    net.series("C", 1e-6, 1.05e-6)
    coils = net.series("L", 1e-5, 1.01e-5)
    net.add("K", *coils, value=0.9)
    net.series("R", 10.0, 10.1)
    net.shunt("R", 1e6, 1.02e6, 2e4)
    net.shunt("C", 1e-11, 1.1e-11, 1e-9)
    return net


def link() -> list[Element]:
    return [
        Series(cause="source", resistance=(1000.0, 1010.0)),
        Line(cause="trace", inductance=L, capacitance=C, resistance=R, lengths=(0.3, 0.3)),
        Line(cause="trace", inductance=np.eye(2) * Z * DELAY, capacitance=np.eye(2) / Z * DELAY, lengths=(0.1, 0.103)),
        Series(
            cause="trace",
            resistance=(10.0, 10.1),
            inductance=(1e-5, 1.01e-5),
            mutual=0.9 * np.sqrt(1e-5 * 1.01e-5),
            capacitance=(1e-6, 1.05e-6),
        ),
        Shunt(
            cause="load",
            resistance=(1e6, 1.02e6),
            capacitance=(1e-11, 1.1e-11),
            across_resistance=2e4,
            across_capacitance=1e-9,
        ),
    ]


def test_a_link_with_everything_uneven(tmp_path: Path) -> None:
    found = solve(link(), FREQUENCIES)
    np.testing.assert_allclose(decibel(found.conversion), decibel(build("1 0", "1 0").run(tmp_path)), atol=0.01)
    np.testing.assert_allclose(decibel(found.gain), decibel(build("0.5 0", "0.5 180").run(tmp_path)), atol=0.01)


def test_phases_agree_as_well(tmp_path: Path) -> None:
    ratio = solve(link(), FREQUENCIES).conversion / build("1 0", "1 0").run(tmp_path)
    np.testing.assert_allclose(ratio, 1.0, atol=2e-3)
