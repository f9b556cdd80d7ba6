"""Reference results from a general algebra system.

    python3 tests/reference/make.py

writes one JSON file a network beside this file: the network in the language of the program, the
order and the static modes of the network, and the numerator and denominator of every function, as
SymPy finds them from the nodal equations of `nodal.py`. The files are committed; the tests read
them and need no Python. The descriptions below share nothing with the program.
"""

import json
import pathlib
import re
import sys
import time

import sympy as sp

import nodal
from nodal import GROUND, Network, s

HERE = pathlib.Path(__file__).parent
CASES = []


def symbols(text):
    return sp.symbols(text, seq=True)


def spelled(expression):
    """An expression in the syntax of the network language."""
    return str(sp.sympify(expression)).replace("**", "^")


class Case:
    """One network, described once: the text for the program and the equations for SymPy."""

    def __init__(self, name):
        self.name = name
        self.lines = []
        self.questions = []
        self.steps = []
        self.values = {}
        self.free = []
        self.results = {}
        self.root = {}
        CASES.append(self)

    # ---- description --------------------------------------------------------------------------

    def text(self, *lines):
        self.lines += lines
        return self

    def step(self, name, action):
        self.steps.append((name, action))

    def part(self, name, a, b, value=None, kind=None):
        self.text(f"{a} -{name}- {b}")
        self.silent(name, a, b, value, kind)
        return self

    def silent(self, name, a, b, value=None, kind=None):
        """A part whose text stands elsewhere."""
        kind = kind or name[0]
        if kind in "ZY":
            if value is not None:
                self.text(f"{name} = {spelled(value)}")
            shown = sp.Symbol(name) if value is None else value
            self.step(name, lambda n: n.impedance(name, a, b, shown if kind == "Z" else 1 / shown))
        elif kind == "meter":
            self.text(f"{name} is meter")
            self.step(name, lambda n: n.meter(name, a, b))
        else:
            method = {"R": "resistor", "C": "capacitor", "L": "inductor", "V": "voltage", "I": "current"}[kind]
            self.step(name, lambda n: getattr(n, method)(name, a, b))

    def parts(self, *triples):
        for name, a, b in triples:
            self.part(name, a, b)
        return self

    def controlled(self, name, a, b, *terms):
        """A controlled source; a term is (coefficient, ("v", a, b)) or (coefficient, ("i", part))."""
        self.text(f"{a} -{name}- {b}")
        self.text(f"{name} = " + combined(terms))

        def action(network):
            control = [(sp.sympify(c), sensed(network, what)) for c, what in terms]
            method = network.voltage if name[0] == "V" else network.current
            method(name, a, b, control)

        self.step(name, action)
        return self

    def driven(self, name, a, b, **drives):
        """An independent source that follows drives."""
        self.text(f"{a} -{name}- {b}")
        self.text(f"{name} = " + " + ".join(f"({spelled(f)})*{d}" for d, f in drives.items()))
        method = "voltage" if name[0] == "V" else "current"
        self.step(name, lambda n: getattr(n, method)(name, a, b, None, dict(drives)))
        return self

    def device(self, name, kind, ends, **options):
        """`ends` as in the text, terminal and node in turn; an option's value is an expression."""
        terminals = dict(zip(ends.split()[::2], ends.split()[1::2]))
        inside = ", ".join(f"{terminal} {node}" for terminal, node in terminals.items())
        line = f"{name} is {kind}({inside})"
        if options:
            line += " with " + ", ".join(f"{o} = {spelled(v)}" for o, v in options.items())
        self.text(line)

        def action(network):
            call(network, kind, name, terminals, options)

        self.step(name, action)
        return self

    def coupling(self, name, first, second, **option):
        word, value = next(iter(option.items()))
        self.text(f"{name} is coupling of {first}, {second} with {word} = {spelled(value)}")
        if word == "M":
            self.step(name, lambda n: n.coupling(name, first, second, mutual=value))
        else:
            self.step(name, lambda n: n.coupling(name, first, second, factor=value))
            self.root[(first, second)] = (sp.Symbol(f"M_{name}"), value)
        return self

    def declare(self, names):
        self.text("free " + ", ".join(names.split()))
        return self

    def relation(self, name, value):
        self.text(f"{name} = {value}")
        self.values[sp.Symbol(name)] = parsed(value)
        return self

    # ---- questions ----------------------------------------------------------------------------

    def network(self, without=()):
        network = Network()
        for name, action in self.steps:
            if name not in without:
                action(network)
        return network

    def transfer(self, name, drive, *terms, without=()):
        self.ask(name, f"({combined(terms)}) / {drive}", without)

        def action():
            network = self.network(without)
            row = {}
            for factor, what in terms:
                for column, value in sensed(network, what).items():
                    row[column] = row.get(column, 0) + factor * value
            return nodal.transfer(network, row, drive, self.values)

        self.questions.append((name, action))
        return self

    def voltage(self, name, a, drive, b=GROUND, without=()):
        return self.transfer(name, drive, (1, ("v", a, b)), without=without)

    def current(self, name, part, drive):
        return self.transfer(name, drive, (1, ("i", part)))

    def ask(self, name, text, without=()):
        ending = " without " + ", ".join(without) if without else ""
        self.text(f"derive {name} = {text}{ending}")

    def impedance(self, name, a, b=GROUND, without=(), inverse=False):
        word = "admittance" if inverse else "impedance"
        self.ask(name, f"{word}({a})" if b == GROUND else f"{word}({a}, {b})", without)

        def action():
            value = nodal.port_impedance(self.network(without), a, b, self.values)
            return 1 / value if inverse else value

        self.questions.append((name, action))
        return self

    def ratio(self, name, upper, lower, drive):
        self.ask(name, f"ratio({combined([(1, upper)])}, {combined([(1, lower)])}) with {drive}")

        def action():
            network = self.network()
            return nodal.transfer(network, sensed(network, upper), drive, self.values) / nodal.transfer(
                network, sensed(network, lower), drive, self.values
            )

        self.questions.append((name, action))
        return self

    def return_ratio(self, name, source):
        self.ask(name, f"return_ratio({source})")
        self.questions.append((name, lambda: nodal.return_ratio(self.network(), source, self.values)))
        return self

    def function(self, name, text, action):
        """A function of functions or a limit; `action` is handed the earlier results."""
        self.ask(name, text)
        self.questions.append((name, lambda: action(self.results)))
        return self

    # ---- the result ---------------------------------------------------------------------------

    def solve(self):
        for name, action in self.questions:
            self.results[name] = sp.cancel(sp.together(sp.sympify(action())))
        degrees = nodal.degree_of_determinant(self.network(), self.values)
        return {
            "name": self.name,
            "netlist": "\n".join(self.lines) + "\n",
            "order": degrees[0],
            "static": degrees[1],
            "functions": {name: self.pair(value) for name, value in self.results.items()},
        }

    def pair(self, value):
        for (first, second), (mutual, factor) in self.root.items():
            value = without_roots(value, first, second, mutual / factor)
        upper, lower = with_whole_numbers(*sp.fraction(sp.cancel(sp.together(value))))
        upper, lower = sp.Poly(upper, s), sp.Poly(lower, s)
        upper, lower = ([sp.expand(c) for c in reversed(p.all_coeffs())] for p in (upper, lower))
        first = next(c for c in lower if c != 0)
        if leading_sign(first) < 0:
            upper, lower = ([-c for c in p] for p in (upper, lower))
        return {
            "numerator": [spelled(sp.expand(c)) for c in upper],
            "denominator": [spelled(sp.expand(c)) for c in lower],
        }


def parsed(text):
    """An expression of the network language; every name is a symbol, also those SymPy uses itself."""
    names = {name: sp.Symbol(name) for name in re.findall(r"[A-Za-z_]\w*", text)}
    return sp.sympify(text.replace("^", "**"), locals=names)


def without_roots(value, first, second, mutual):
    """The square root of L1*L2 in a numerator as M/k; the square of a root is its inductance."""
    roots = {name: sp.Symbol(f"root {name}", positive=True) for name in (first, second)}
    swap = {sp.Symbol(name): root**2 for name, root in roots.items()}
    upper, lower = sp.fraction(sp.cancel(sp.powdenest(sp.expand(value.subs(swap)), force=True)))
    back = []
    for polynomial in (upper, lower):
        total = sp.Integer(0)
        for (i, j), coefficient in sp.Poly(polynomial, *roots.values()).terms():
            odd = i % 2
            assert odd == j % 2
            total += coefficient * sp.Symbol(first) ** (i // 2) * sp.Symbol(second) ** (j // 2) * mutual**odd
        back.append(total)
    return back[0] / back[1]


def with_whole_numbers(upper, lower):
    """Both with integer coefficients and no common number."""
    both = [sp.Poly(p, *sorted(p.free_symbols | {s}, key=str)) for p in (upper, lower)]
    scale = sp.ilcm(*[c.q for p in both for c in p.coeffs()])
    content = sp.igcd(*[c * scale for p in both for c in p.coeffs()])
    return [sp.expand(p.as_expr() * scale / content) for p in both]


def leading_sign(coefficient):
    """The sign of the term of lowest total degree, among these of the highest power of the first name."""
    names = sorted(coefficient.free_symbols, key=str)
    if not names:
        return 1 if coefficient > 0 else -1
    terms = sp.Poly(coefficient, *names).terms()
    _, value = max(terms, key=lambda term: (-sum(term[0]), term[0]))
    return 1 if value > 0 else -1


def combined(terms):
    pieces = []
    for factor, what in terms:
        if what[0] == "v":
            text = f"voltage({what[1]})" if what[2] == GROUND else f"voltage({what[1]}, {what[2]})"
        else:
            text = f"current({what[1]})"
        pieces.append(text if factor == 1 else f"({spelled(factor)})*{text}")
    return " + ".join(pieces)


def sensed(network, what):
    if what[0] == "v":
        return network.across(what[1], what[2])
    return network.currents[what[1]]


def call(network, kind, name, t, options):
    """Hand the terminals to the equations in their own order."""
    order = {
        "opamp": ("+", "-", "out", "ref"),
        "diffamp": ("+", "-", "out+", "out-"),
        "buffer": ("in", "out", "ref"),
        "transconductor": ("+", "-", "out", "ref"),
        "nullor": ("+", "-", "p", "q"),
        "conveyor": ("x", "y", "z", "ref"),
        "transformer": ("p1", "p2", "s1", "s2"),
        "gyrator": ("p1", "p2", "s1", "s2"),
        "bjt": ("b", "c", "e"),
        "fet": ("g", "d", "s", "b"),
        "triode": ("g", "a", "k"),
    }[kind]
    places = [t[word] for word in order if word in t]
    more = {"cm": t["cm"]} if "cm" in t else {}
    getattr(network, kind)(name, *places, **options, **more)


def main():
    import networks  # noqa: F401  (fills CASES)

    wanted = sys.argv[1:]
    for case in networks.CASES:
        if wanted and case.name not in wanted:
            continue
        start = time.time()
        path = HERE / f"{case.name}.json"
        path.write_text(json.dumps(case.solve(), indent=1, ensure_ascii=False) + "\n")
        print(f"{case.name} {time.time() - start:.1f} s", flush=True)


if __name__ == "__main__":
    sys.modules["make"] = sys.modules["__main__"]
    main()
