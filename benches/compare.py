#!/usr/bin/env python3
"""Reduced transfer functions: cutloop against SymPy and python-flint on the same equations.

Every network consists of conductances, capacitors and inductors behind one voltage source. cutloop
gets its text and writes the reduced function as JSON; the whole process counts, and, as the time
beyond a process that does nothing, the work alone. The others get the
finished matrix of the nodal equations (inductor currents are unknowns too) as polynomials over the
integers; what counts is N and D as determinants (fraction-free elimination after Bareiss) and
N/gcd, D/gcd. Imports, matrix building and printing do not count for them.

    cargo build --release
    pip install sympy python-flint
    python3 benches/compare.py
"""

import json
import math
import multiprocessing
import platform
import queue
import resource
import statistics
import subprocess
import sys
import time
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
TOOL = ROOT / "target/release/cutloop"
SECONDS = 60
BYTES = 4 << 30


class Network:
    """Parts as (kind, name, node, node); "0" is the reference, the source stands at "in"."""

    def __init__(self, parts, output, ties=None):
        self.parts, self.output, self.ties = parts, output, ties or {}

    def value(self, name):
        return self.ties.get(name, name)

    def symbols(self):
        return ["s"] + sorted({self.value(part[1]) for part in self.parts})

    def text(self):
        place = lambda node: "ground" if node == "0" else node
        lines = ["in -Vs- ground"]
        for kind, name, a, b in self.parts:
            lines.append(f"{place(a)} -{name}- {place(b)}")
            if kind == "G":
                lines.append(f"{name} is conductance")
        if self.ties:
            lines.append("free " + ", ".join(sorted(set(self.ties.values()))))
            lines += [f"{name} = {value}" for name, value in self.ties.items()]
        lines.append(f"derive H = voltage({self.output}) / Vs")
        return "\n".join(lines)

    def equations(self, symbol, zero, one):
        """Rows of the matrix and the column of the right side, over a ring of polynomials."""
        nodes = sorted({n for part in self.parts for n in part[2:]} - {"0", "in"})
        place = {node: index for index, node in enumerate(nodes)}
        coils = [part for part in self.parts if part[0] == "L"]
        size = len(nodes) + len(coils)
        rows = [[zero] * size for _ in range(size)]
        right = [zero] * size
        for kind, name, a, b in self.parts:
            if kind == "L":
                continue
            y = symbol(self.value(name)) * (symbol("s") if kind == "C" else one)
            for x, other in ((a, b), (b, a)):
                if x not in place:
                    continue
                rows[place[x]][place[x]] += y
                if other in place:
                    rows[place[x]][place[other]] -= y
                elif other == "in":
                    right[place[x]] += y
        for index, (_, name, a, b) in enumerate(coils, len(nodes)):
            rows[index][index] -= symbol("s") * symbol(self.value(name))
            for x, sign in ((a, one), (b, -one)):
                if x in place:
                    rows[place[x]][index] += sign
                    rows[index][place[x]] += sign
                elif x == "in":
                    right[index] -= sign
        return rows, right, place[self.output]


def bareiss(rows, zero, divide):
    """Determinant by fraction-free elimination (Bareiss 1968)."""
    rows = [list(row) for row in rows]
    size, before, sign = len(rows), None, 1
    for k in range(size - 1):
        pivot = next((r for r in range(k, size) if rows[r][k] != zero), None)
        if pivot is None:
            return zero
        if pivot != k:
            rows[k], rows[pivot], sign = rows[pivot], rows[k], -sign
        for r in range(k + 1, size):
            for c in range(k + 1, size):
                entry = rows[r][c] * rows[k][k] - rows[r][k] * rows[k][c]
                rows[r][c] = entry if before is None else divide(entry, before)
        before = rows[k][k]
    return rows[-1][-1] if sign > 0 else -rows[-1][-1]


def replaced(rows, right, column):
    return [row[:column] + [entry] + row[column + 1 :] for row, entry in zip(rows, right)]


def by_flint(network):
    from flint import fmpz_mpoly_ctx, Ordering

    names = network.symbols()
    ring = fmpz_mpoly_ctx.get(tuple(names), Ordering.degrevlex)
    generators = dict(zip(names, ring.gens()))
    zero, one = ring.from_dict({}), ring.constant(1)
    rows, right, column = network.equations(generators.__getitem__, zero, one)
    start = time.perf_counter()
    divide = lambda a, b: divmod(a, b)[0]
    below = bareiss(rows, zero, divide)
    above = bareiss(replaced(rows, right, column), zero, divide)
    common = above.gcd(below)
    above, below = divide(above, common), divide(below, common)
    return time.perf_counter() - start, len(list(above.terms())) + len(list(below.terms()))


def by_sympy(network):
    from sympy import ZZ, ring

    names = network.symbols()
    made = ring(names, ZZ)
    polynomials, generators = made[0], dict(zip(names, made[1:]))
    rows, right, column = network.equations(
        generators.__getitem__, polynomials.zero, polynomials.one
    )
    start = time.perf_counter()
    divide = lambda a, b: a.exquo(b)
    below = bareiss(rows, polynomials.zero, divide)
    above = bareiss(replaced(rows, right, column), polynomials.zero, divide)
    above, below = above.cancel(below)
    return time.perf_counter() - start, len(above) + len(below)


def limited(work, network):
    """(seconds, terms) or a word, in a process with bounds of time and memory."""
    results = multiprocessing.Queue()

    def child():
        resource.setrlimit(resource.RLIMIT_AS, (BYTES, BYTES))
        try:
            results.put(work(network))
        except MemoryError:
            results.put("memory")

    process = multiprocessing.Process(target=child)
    process.start()
    try:
        found = results.get(timeout=SECONDS)
    except queue.Empty:
        found = "time"
    process.kill()
    process.join()
    return found


def idle():
    """Seconds of a process that answers nothing."""
    times = []
    for _ in range(30):
        start = time.perf_counter()
        subprocess.run([TOOL, "--version"], input="", capture_output=True, text=True)
        times.append(time.perf_counter() - start)
    return min(times)


def by_cutloop(network):
    """Seconds of the whole process, least of ten, and terms of the answer."""
    command = [TOOL, "formula", "--format", "json", "--budget", "terms=1e7,seconds=60", "-"]
    times = []
    for _ in range(10):
        start = time.perf_counter()
        done = subprocess.run(command, input=network.text(), capture_output=True, text=True)
        times.append(time.perf_counter() - start)
        if done.returncode not in (0, 3):
            raise SystemExit(done.stderr)
        if times[-1] > 1:
            break
    result = json.loads(done.stdout)["results"][0]
    if "numerator" not in result:
        return min(times), None
    count = lambda text: 0 if text == "0" else text.count(" + ") + text.count(" - ") + 1
    sides = [result["numerator"], result["denominator"]]
    return min(times), sum(count(entry) for side in sides for entry in side)


def rc_ladder(n, tied=False):
    parts, ties = [], {}
    for k in range(1, n + 1):
        before = "in" if k == 1 else f"n{k - 1}"
        parts += [("G", f"G{k}", before, f"n{k}"), ("C", f"C{k}", f"n{k}", "0")]
        if tied:
            ties |= {f"G{k}": "G", f"C{k}": "C"}
    return Network(parts, f"n{n}", ties)


def terminated_ladder(n):
    parts = [("G", "Gs", "in", "n0")]
    for k in range(1, n + 1):
        node = (k + 1) // 2 - 1
        if k % 2:
            parts.append(("C", f"C{k}", f"n{node}", "0"))
        else:
            parts.append(("L", f"L{k}", f"n{node}", f"n{node + 1}"))
    parts.append(("G", "GL", f"n{n // 2}", "0"))
    return Network(parts, f"n{n // 2}")


def rc_grid(k):
    name = lambda row, column: "in" if (row, column) == (1, 1) else f"n{row}x{column}"
    parts = []
    for row in range(1, k + 1):
        for column in range(1, k + 1):
            if column < k:
                parts.append(("G", f"G{len(parts)}", name(row, column), name(row, column + 1)))
            if row < k:
                parts.append(("G", f"G{len(parts)}", name(row, column), name(row + 1, column)))
            if (row, column) != (1, 1):
                parts.append(("C", f"C{row}x{column}", name(row, column), "0"))
    return Network(parts, name(k, k))


def complete_graph(n):
    names = ["0", "in"] + [f"n{k}" for k in range(2, n)]
    pairs = [(a, b) for a in range(n) for b in range(a + 1, n) if (a, b) != (0, 1)]
    parts = []
    for index, (a, b) in enumerate(pairs):
        kind = "CG"[index % 2]
        parts.append((kind, f"{kind}{index}", names[a], names[b]))
    return Network(parts, names[-1])


def twin_t():
    parts = [
        ("G", "G1", "in", "a"), ("G", "G2", "a", "out"), ("C", "C3", "a", "0"),
        ("C", "C1", "in", "b"), ("C", "C2", "b", "out"), ("G", "G3", "b", "0"),
    ]
    return Network(parts, "out", {"G1": "G", "G2": "G", "C1": "C", "C2": "C"})


FAMILIES = (
    [(f"RC ladder, {n} sections", rc_ladder(n)) for n in (4, 6, 8, 20)]
    + [(f"RC ladder, tied, {n} sections", rc_ladder(n, True)) for n in (8, 16, 32, 64)]
    + [(f"terminated LC ladder, order {n}", terminated_ladder(n)) for n in (5, 9, 15)]
    + [(f"RC grid {k}×{k}", rc_grid(k)) for k in (2, 3, 4)]
    + [(f"complete graph, {n} nodes", complete_graph(n)) for n in (5, 6, 7)]
    + [("twin-T, matched", twin_t())]
)


def shown(found):
    return f"{found[0] * 1000:.1f} ms" if isinstance(found, tuple) else f"out of {found}"


def main():
    import flint
    import sympy

    print(f"{platform.machine()}, {platform.system()}, Python {platform.python_version()}, ", end="")
    print(f"SymPy {sympy.__version__}, python-flint {flint.__version__}; ", end="")
    print(f"bounds {SECONDS} s and {BYTES >> 30} GiB each\n")
    print("| network | terms | process | work | python-flint | ratio | SymPy | ratio |")
    print("| --- | --- | --- | --- | --- | --- | --- | --- |")
    nothing = idle()
    ratios = {}
    for name, network in FAMILIES:
        own, terms = by_cutloop(network)
        work = max(own - nothing, 0.0001)
        cells = []
        for system, compute in (("python-flint", by_flint), ("SymPy", by_sympy)):
            found = limited(compute, network)
            ratio = "–"
            if isinstance(found, tuple) and terms is not None:
                if found[1] != terms:
                    raise SystemExit(f"{name}: {terms} terms, {system} has {found[1]}")
                ratios.setdefault((system, "process"), []).append(found[0] / own)
                ratios.setdefault((system, "work"), []).append(found[0] / work)
                ratio = f"{found[0] / work:.1f}"
            cells += [shown(found), ratio]
        counted = "order and degrees only" if terms is None else f"{terms}"
        own, work = f"{own * 1000:.1f} ms", f"{work * 1000:.1f} ms"
        print(f"| {name} | {counted} | {own} | {work} | {' | '.join(cells)} |")
        sys.stdout.flush()
    print()
    for (system, against), of in sorted(ratios.items()):
        mean = math.exp(statistics.fmean(map(math.log, of)))
        print(f"{system} against the {against}: geometric mean {mean:.1f}, least {min(of):.1f}, of {len(of)}")


if __name__ == "__main__":
    multiprocessing.set_start_method("fork")
    main()
