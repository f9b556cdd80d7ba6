"""Poles, zeros, residues and slow tails from SciPy.

    python3 tests/figures/make.py

writes `figures.json` beside this file. The functions are found by SymPy from the nodal equations of
`tests/reference/nodal.py`; poles, zeros and residues at the values given come from
`scipy.signal.residue` and `numpy.roots` over frequencies scaled to one. The networks share nothing
with the program but their text. The committed file was made with SciPy 1.17.1 and SymPy 1.14.0.
"""

import json
import pathlib
import sys

import numpy as np
import sympy as sp
from scipy import signal

HERE = pathlib.Path(__file__).parent
sys.path.insert(0, str(HERE.parent / "reference"))

import nodal  # noqa: E402
from nodal import GROUND, Network, s  # noqa: E402

CASES = []
METHODS = {"R": "resistor", "C": "capacitor", "L": "inductor"}


def case(name, paths, values, output, scale, devices=(), stray=None):
    """Parts as (name, node, node), values in SI units, frequencies near `scale`."""
    text = ["in -Vs- ground"]
    network = Network()
    network.voltage("Vs", "in", GROUND)
    for part, a, b in paths:
        text.append(f"{a} -{part}- {b}")
        getattr(network, METHODS[part[0]])(part, a, b)
    for device in devices:
        name_of, inp, out = device
        text.append(f"{name_of} is buffer(in {inp}, out {out})")
        network.buffer(name_of, inp, out)
    for part, value in values.items():
        tolerance = f" +- {stray}" if stray else ""
        text.append(f"{part} : {value}{tolerance}")
    text.append(f"derive H = voltage({output}) / Vs")
    function = transfer(network, output)
    numbers = {sp.Symbol(part): sp.Rational(value) for part, value in values.items()}
    above, below = sp.fraction(sp.together(function.subs(numbers)))
    w = sp.Rational(scale)
    sides = [sp.Poly(sp.expand(side.subs(s, s * w)), s) for side in (above, below)]
    top, bottom = (np.array([float(c) for c in side.all_coeffs()]) for side in sides)
    top, bottom = top / bottom[0], bottom / bottom[0]
    residues, poles, _ = signal.residue(top, bottom)
    zeros = np.roots(top)
    order = np.lexsort((-poles.imag, poles.real, abs(poles)))
    CASES.append({
        "name": name,
        "netlist": "\n".join(text) + "\n",
        "final": float(sides[0].eval(0) / sides[1].eval(0)),
        "poles": [[poles[i].real * scale, poles[i].imag * scale] for i in order],
        "residues": [[residues[i].real * scale, residues[i].imag * scale] for i in order],
        "zeros": sorted([[z.real * scale, z.imag * scale] for z in zeros]),
    })


def transfer(network, output):
    """voltage(output)/Vs as an expression."""
    return sp.cancel(nodal.transfer(network, network.across(output, GROUND), "Vs"))


case("compensated_divider_off_by_little",
     [("R1", "in", "out"), ("C1", "in", "out"), ("R2", "out", "ground"), ("C2", "out", "ground")],
     {"R1": "9000000", "R2": "1000000", "C1": "1.34e-11", "C2": "1.2e-10"},
     "out", 10**4, stray="5 %")
case("two_sections_of_nearly_one_time_constant",
     [("R1", "in", "a"), ("C1", "in", "a"), ("R2", "a", "ground"), ("R3", "b", "out"), ("C3", "out", "ground")],
     {"R1": "10000", "C1": "1.01e-8", "R2": "1000", "R3": "1000", "C3": "1e-7"},
     "out", 10**4, devices=[("U1", "a", "b")], stray="2 %")
case("ladder_of_three",
     [("R1", "in", "a"), ("C1", "a", "ground"), ("R2", "a", "b"), ("C2", "b", "ground"), ("R3", "b", "out"),
      ("C3", "out", "ground")],
     {"R1": "1000", "C1": "1e-7", "R2": "2200", "C2": "4.7e-8", "R3": "4700", "C3": "1e-8"},
     "out", 10**4)
case("supply_filter_with_a_slow_branch",
     [("R1", "in", "out"), ("R2", "out", "x"), ("C2", "x", "ground"), ("C1", "out", "ground")],
     {"R1": "100", "R2": "10000", "C2": "1e-5", "C1": "1e-6"},
     "out", 10**3, stray="20 %")
case("resonance_with_a_trap_beside_it",
     [("R1", "in", "out"), ("L1", "out", "x"), ("C1", "x", "y"), ("R3", "y", "ground"), ("R2", "out", "ground")],
     {"R1": "1", "L1": "1e-3", "C1": "1e-6", "R3": "50", "R2": "1000"},
     "out", 10**5, stray="5 %")
case("series_resonance",
     [("R1", "in", "a"), ("L1", "a", "out"), ("C1", "out", "ground")],
     {"R1": "20", "L1": "1e-3", "C1": "1e-6"}, "out", 10**5)
case("bridged_branch",
     [("R1", "in", "a"), ("R2", "a", "out"), ("C1", "a", "ground"), ("C2", "in", "out"), ("R4", "out", "ground"),
      ("C4", "out", "ground")],
     {"R1": "1000", "R2": "1500", "C1": "2.2e-8", "C2": "1e-9", "R4": "10000",
      "C4": "3e-9"}, "out", 10**5)
case("three_branches_of_a_slow_capacitor",
     [("R1", "in", "out"), ("R2", "out", "ground"), ("C2", "out", "ground"), ("R3", "out", "x"), ("C3", "x", "ground"),
      ("R4", "out", "y"), ("C4", "y", "ground")],
     {"R1": "50", "R2": "1000000", "C2": "1e-9", "R3": "100000", "C3": "1e-7", "R4": "220000",
      "C4": "1e-7"}, "out", 10**4, stray="10 %")

text = json.dumps({"cases": CASES}, indent=1) + "\n"
(HERE / "figures.json").write_text(text)
print(len(CASES), "cases")
