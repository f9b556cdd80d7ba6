"""Nodal equations of small networks with SymPy: the slow, plain way.

Each part adds its Kirchhoff terms and, where it needs one, a current of its own with a
constitutive row. Nothing is contracted, nothing is expanded over trees: the equations are solved
as they stand and the quotient is cancelled at the end.
"""

import random

import sympy as sp
from sympy.polys.matrices import DomainMatrix

s = sp.Symbol("s")
GROUND = "ground"


class Network:
    """A network as rows of linear equations in node voltages and branch currents."""

    def __init__(self):
        self.nodes = {}
        self.branches = {}
        self.unknowns = []
        self.rows = []
        self.flows = []
        self.ends = {}
        self.currents = {}
        self.reactive = []
        self.coils = {}
        self.coupled = set()
        self.couplings = []
        self.drives = []
        self.values = {}
        self.controls = {}
        self.gains = {}

    # ---- unknowns and rows --------------------------------------------------------------------

    def node(self, name):
        if name in ("gnd", GROUND):
            return None
        if name not in self.nodes:
            self.nodes[name] = len(self.unknowns)
            self.unknowns.append(("v", name))
        return self.nodes[name]

    def branch(self, name):
        self.branches[name] = len(self.unknowns)
        self.unknowns.append(("i", name))
        return self.branches[name]

    def across(self, a, b):
        """The voltage of a against b as a row."""
        row = {}
        for name, sign in ((a, 1), (b, -1)):
            column = self.node(name)
            if column is not None:
                row[column] = row.get(column, 0) + sign
        return row

    def flow(self, a, b, current):
        """The current, a row, flows from a to b through a part."""
        self.flows.append((a, b, current))

    def row(self, *terms, drive=None):
        """The sum of coefficient times row is zero, or equals what the drives put in."""
        total = {}
        for coefficient, row in terms:
            for column, value in row.items():
                total[column] = total.get(column, 0) + coefficient * value
        self.rows.append((total, drive or {}))

    # ---- parts ----------------------------------------------------------------------------------

    def resistor(self, name, a, b, value=None):
        value = sp.Symbol(name) if value is None else value
        self.ends[name] = (a, b)
        current = scaled(1 / value, self.across(a, b))
        self.currents[name] = current
        self.flow(a, b, current)

    def capacitor(self, name, a, b, value=None):
        value = sp.Symbol(name) if value is None else value
        self.ends[name] = (a, b)
        self.reactive.append(name)
        current = scaled(s * value, self.across(a, b))
        self.currents[name] = current
        self.flow(a, b, current)

    def inductor(self, name, a, b, value=None):
        value = sp.Symbol(name) if value is None else value
        self.ends[name] = (a, b)
        self.reactive.append(name)
        self.coils[name] = value
        current = {self.branch(name): 1}
        self.currents[name] = current
        self.flow(a, b, current)

    def coupling(self, name, first, second, mutual=None, factor=None):
        """Coupled coils: by the mutual inductance, or by k with M = k*sqrt(L1*L2)."""
        self.couplings.append((name, first, second, mutual, factor))

    def impedance(self, name, a, b, value):
        self.ends[name] = (a, b)
        top, bottom = sp.fraction(sp.together(value))
        current = {self.branch(name): 1}
        self.currents[name] = current
        self.flow(a, b, current)
        self.row((bottom, self.across(a, b)), (-top, current))

    def voltage(self, name, a, b, control=None, drive=None):
        """A source of voltage: independent (its own drive), driven, or controlled."""
        self.ends[name] = (a, b)
        current = {self.branch(name): 1}
        self.currents[name] = current
        self.flow(a, b, current)
        if control is None:
            self.add_drives(drive or {name: 1})
            self.row((1, self.across(a, b)), drive=drive or {name: 1})
        else:
            self.controls[name] = ("V", a, b, control, len(self.rows))
            self.relate(self.across(a, b), control)

    def current(self, name, a, b, control=None, drive=None):
        """A source of current flowing from a to b inside the part."""
        self.ends[name] = (a, b)
        current = {self.branch(name): 1}
        self.currents[name] = current
        self.flow(a, b, current)
        if control is None:
            self.add_drives(drive or {name: 1})
            self.row((1, current), drive=drive or {name: 1})
        else:
            self.controls[name] = ("I", a, b, control, len(self.rows))
            self.relate(current, control)

    def add_drives(self, drive):
        for name in drive:
            if name not in self.drives:
                self.drives.append(name)

    def meter(self, name, a, b):
        self.ends[name] = (a, b)
        current = {self.branch(name): 1}
        self.currents[name] = current
        self.flow(a, b, current)
        self.row((1, self.across(a, b)))

    def relate(self, left, control):
        """left = sum of coefficient times sensed quantity, denominators cleared."""
        bottom = sp.Integer(1)
        for coefficient, _ in control:
            bottom = sp.lcm(bottom, sp.fraction(sp.together(sp.sympify(coefficient)))[1])
        terms = [(bottom, left)]
        for coefficient, sensed in control:
            terms.append((-sp.cancel(coefficient * bottom), sensed))
        self.rows.append((None, terms))

    # ---- devices ------------------------------------------------------------------------------

    def opamp(self, name, plus, minus, out, ref=GROUND, gain=None, rin=None, rout=None):
        if rin is not None:
            self.resistor(f"rin_{name}", plus, minus, rin)
        inner = out
        if rout is not None:
            inner = f"{name}'"
            self.resistor(f"rout_{name}", inner, out, rout)
        current = {self.branch(name): 1}
        self.currents[name] = current
        self.flow(inner, ref, current)
        if gain is None:
            self.row((1, self.across(plus, minus)))
        else:
            sensed = [(gain, self.across(plus, minus))]
            self.controls[name] = ("V", inner, ref, sensed, len(self.rows))
            self.relate(self.across(inner, ref), sensed)

    def diffamp(self, name, plus, minus, out_plus, out_minus, gain, cm=GROUND):
        first = {self.branch(name + "+"): 1}
        second = {self.branch(name + "-"): 1}
        self.flow(out_plus, GROUND, first)
        self.flow(out_minus, GROUND, second)
        self.relate(self.across(out_plus, out_minus), [(gain, self.across(plus, minus))])
        self.row(
            (1, self.across(out_plus, GROUND)),
            (1, self.across(out_minus, GROUND)),
            (-2, self.across(cm, GROUND)),
        )

    def buffer(self, name, inp, out, ref=GROUND, gain=1):
        current = {self.branch(name): 1}
        self.currents[name] = current
        self.flow(out, ref, current)
        sensed = [(gain, self.across(inp, ref))]
        self.controls[name] = ("V", out, ref, sensed, len(self.rows))
        self.relate(self.across(out, ref), sensed)

    def transconductor(self, name, plus, minus, out, ref=GROUND, gm=None):
        gm = sp.Symbol(f"gm_{name}") if gm is None else gm
        self.current(name, ref, out, [(gm, self.across(plus, minus))])

    def nullor(self, name, plus, minus, p, q):
        current = {self.branch(name): 1}
        self.currents[name] = current
        self.flow(q, p, current)
        self.row((1, self.across(plus, minus)))

    def conveyor(self, name, x, y, z, ref=GROUND, polarity=1):
        into_x = {self.branch(name + ".x"): 1}
        self.flow(x, ref, into_x)
        self.row((1, self.across(x, y)))
        self.current(name, z, ref, [(polarity, into_x)])

    def transformer(self, name, p1, p2, s1, s2, ratio=None):
        ratio = sp.Symbol(f"ratio_{name}") if ratio is None else ratio
        first = {self.branch(name + ".p"): 1}
        second = {self.branch(name + ".s"): 1}
        self.flow(p1, p2, first)
        self.flow(s1, s2, second)
        self.row((1, self.across(p1, p2)), (-ratio, self.across(s1, s2)))
        self.row((1, second), (ratio, first))

    def gyrator(self, name, p1, p2, s1, s2, g=None):
        g = sp.Symbol(f"g_{name}") if g is None else g
        self.flow(p1, p2, scaled(g, self.across(s1, s2)))
        self.flow(s1, s2, scaled(-g, self.across(p1, p2)))

    def bjt(self, name, b, c, e, gm=None, rpi=None, beta=None, ro=None, cpi=None, cmu=None, rb=None):
        gm = sp.Symbol(f"gm_{name}") if gm is None else gm
        if beta is not None:
            rpi = beta / gm
        rpi = sp.Symbol(f"rpi_{name}") if rpi is None else rpi
        inner = b
        if rb is not None:
            inner = f"{name}.b'"
            self.resistor(f"rb_{name}", b, inner, rb)
        self.resistor(f"rpi_{name}", inner, e, rpi)
        if cpi is not None:
            self.capacitor(f"cpi_{name}", inner, e, cpi)
        if cmu is not None:
            self.capacitor(f"cmu_{name}", inner, c, cmu)
        if ro is not None:
            self.resistor(f"ro_{name}", c, e, ro)
        self.current(name, c, e, [(gm, self.across(inner, e))])

    def fet(self, name, g, d, so, b=None, gm=None, gds=None, gmb=None, cgs=None, cgd=None, cdb=None, csb=None):
        gm = sp.Symbol(f"gm_{name}") if gm is None else gm
        b = so if b is None else b
        sensed = [(gm, self.across(g, so))]
        if gmb is not None:
            sensed.append((gmb, self.across(b, so)))
        self.current(name, d, so, sensed)
        if gds is not None:
            self.resistor(f"gds_{name}", d, so, 1 / gds)
        for word, value, x, y in (("cgs", cgs, g, so), ("cgd", cgd, g, d), ("cdb", cdb, d, b), ("csb", csb, so, b)):
            if value is not None:
                self.capacitor(f"{word}_{name}", x, y, value)

    def triode(self, name, g, a, k, gm=None, ra=None, mu=None):
        ra = sp.Symbol(f"ra_{name}") if ra is None else ra
        if mu is not None:
            gm = mu / ra
        gm = sp.Symbol(f"gm_{name}") if gm is None else gm
        self.resistor(f"ra_{name}", a, k, ra)
        self.current(name, a, k, [(gm, self.across(g, k))])

    # ---- the equations ------------------------------------------------------------------------

    def equations(self, extra=None):
        """Rows (coefficients, right-hand sides); `extra` puts one of them in place of another."""
        extra = extra or {}
        rows = []
        for index, (coefficients, drive) in enumerate(self.rows):
            if index in extra:
                rows.append(extra[index])
            elif coefficients is None:
                total = {}
                for factor, row in drive:
                    for column, value in row.items():
                        total[column] = total.get(column, 0) + factor * value
                rows.append((total, {}))
            else:
                rows.append((coefficients, drive))
        rows += self.coil_rows()
        for name in self.nodes:
            total = {}
            for a, b, current in self.flows:
                sign = (a == name) - (b == name)
                if sign:
                    for column, value in current.items():
                        total[column] = total.get(column, 0) + sign * value
            rows.append((total, {}))
        return rows

    def coil_rows(self):
        rows = []
        for name, value in self.coils.items():
            total = dict(self.across(*self.ends[name]))
            own = self.branches[name]
            total[own] = total.get(own, 0) - s * value
            for _, first, second, mutual, factor in self.couplings:
                if name in (first, second):
                    other = second if name == first else first
                    if mutual is None:
                        mutual = factor * sp.sqrt(self.coils[first] * self.coils[second])
                    column = self.branches[other]
                    total[column] = total.get(column, 0) - s * mutual
            rows.append((total, {}))
        return rows

    def matrix(self, substitution, rows=None):
        """The square matrix over Z[symbols, s] after substitution, each row cleared."""
        rows = self.equations() if rows is None else rows
        size = len(self.unknowns)
        assert len(rows) == size, (len(rows), size, self.unknowns)
        entries = []
        scales = []
        for coefficients, _ in rows:
            line = [resolve(coefficients.get(column, 0), substitution) for column in range(size)]
            bottom = sp.Integer(1)
            for value in line:
                bottom = sp.lcm(bottom, sp.fraction(value)[1])
            entries.append([sp.cancel(value * bottom) for value in line])
            scales.append(bottom)
        return entries, scales


def scaled(factor, row):
    return {column: factor * value for column, value in row.items()}


def resolve(expression, substitution):
    expression = sp.sympify(expression)
    if substitution:
        for _ in range(60):
            after = expression.subs(substitution)
            if after == expression:
                break
            expression = after
    return sp.together(expression)


def determinant(entries):
    """The determinant of a matrix of polynomials."""
    if not entries:
        return sp.Integer(1)
    matrix = DomainMatrix.from_list_sympy(len(entries), len(entries), entries)
    field = matrix.domain.get_field()
    sparse = matrix.convert_to(field).to_sparse().to_dok()
    return sp.cancel(field.to_sympy(eliminate(sparse, len(entries), field)))


def eliminate(entries, size, field):
    """Determinant over a field, pivots by least fill."""
    rows = {i: {} for i in range(size)}
    for (i, j), value in entries.items():
        if value:
            rows[i][j] = value
    result = field.one
    order = []
    while rows:
        counts = {}
        for row in rows.values():
            for j in row:
                counts[j] = counts.get(j, 0) + 1
        best = None
        for i, row in rows.items():
            for j, value in row.items():
                cost = ((len(row) - 1) * (counts[j] - 1), i, j)
                if best is None or cost < best:
                    best = cost
        if best is None or any(not row for row in rows.values()):
            return field.zero
        _, i, j = best
        pivot_row = rows.pop(i)
        pivot = pivot_row[j]
        result = result * pivot
        order.append((i, j))
        for other in rows.values():
            if j in other:
                factor = other.pop(j) / pivot
                for column, value in pivot_row.items():
                    if column != j:
                        changed = other.get(column, field.zero) - factor * value
                        if changed:
                            other[column] = changed
                        else:
                            other.pop(column, None)
    permutation = dict(order)
    return -result if parity([permutation[i] for i in range(size)]) else result


def parity(permutation):
    seen = set()
    odd = 0
    for start in range(len(permutation)):
        length = 0
        while start not in seen:
            seen.add(start)
            start = permutation[start]
            length += 1
        odd ^= length > 0 and (length - 1) & 1
    return odd


def solve(network, substitution, rows, right):
    """All unknowns for one right-hand side, by elimination over the field of fractions."""
    entries, scales = network.matrix(substitution, rows)
    size = len(entries)
    vector = [resolve(value, substitution) * scale for value, scale in zip(right, scales)]
    augmented = [row + [value] for row, value in zip(entries, vector)]
    matrix = DomainMatrix.from_list_sympy(size, size + 1, augmented)
    field = matrix.domain.get_field() if not matrix.domain.is_Field else matrix.domain
    dok = matrix.convert_to(field).to_sparse().to_dok()
    table = {i: {} for i in range(size)}
    for (i, j), value in dok.items():
        if value:
            table[i][j] = value
    pivots = []
    while table:
        counts = {}
        for row in table.values():
            for j in row:
                counts[j] = counts.get(j, 0) + 1
        best = None
        for i, row in table.items():
            for j in row:
                if j < size:
                    cost = ((len(row) - 1) * (counts[j] - 1), i, j)
                    if best is None or cost < best:
                        best = cost
        if best is None:
            raise ZeroDivisionError("no unique solution")
        _, i, j = best
        pivot_row = table.pop(i)
        pivot = pivot_row.pop(j)
        pivot_row = {column: value / pivot for column, value in pivot_row.items()}
        pivots.append((j, pivot_row))
        for other in table.values():
            if j in other:
                factor = other.pop(j)
                for column, value in pivot_row.items():
                    changed = other.get(column, field.zero) - factor * value
                    if changed:
                        other[column] = changed
                    else:
                        other.pop(column, None)
        if any(not row for row in table.values()):
            raise ZeroDivisionError("no unique solution")
    answer = {}
    for j, row in reversed(pivots):
        total = row.get(size, field.zero)
        for column, value in row.items():
            if column != size:
                total = total - value * answer[column]
        answer[j] = total
    return {j: sp.cancel(field.to_sympy(value)) for j, value in answer.items()}


# ---- questions --------------------------------------------------------------------------------


def read(row, answer, substitution):
    total = sp.Integer(0)
    for column, value in row.items():
        total += resolve(value, substitution) * answer[column]
    return sp.cancel(sp.together(total))


def transfer(network, response, drive, substitution=None):
    """The response, a row, over one drive."""
    rows = network.equations()
    right = [row_drive.get(drive, 0) for _, row_drive in rows]
    return read(response, solve(network, substitution, rows, right), substitution)


def port_impedance(network, a, b, substitution=None):
    rows = network.equations()
    right = [0] * len(rows)
    start = len(rows) - len(network.nodes)
    for index, name in enumerate(network.nodes):
        right[start + index] = (name == a) - (name == b)
    answer = solve(network, substitution, rows, right)
    return read(network.across(a, b), answer, substitution)


def return_ratio(network, name, substitution=None):
    """Bode's: the control drives nothing, the source is one, minus what comes back."""
    kind, a, b, control, index = network.controls[name]
    left = network.across(a, b) if kind == "V" else network.currents[name]
    rows = network.equations({index: (left, {})})
    right = [0] * len(rows)
    right[index] = 1
    answer = solve(network, substitution, rows, right)
    total = sum(
        (resolve(coefficient, substitution) * read(row, answer, substitution) for coefficient, row in control),
        sp.Integer(0),
    )
    return sp.cancel(sp.together(-total))


def numbers_for(symbols, seed):
    source = random.Random(seed)
    return {symbol: sp.Rational(source.randint(3, 997), source.randint(3, 97)) for symbol in symbols}


def degree_of_determinant(network, substitution, seed=7, chosen=None):
    """(degree, lowest degree) of the full determinant in s at random values of all symbols."""
    entries, _ = network.matrix(substitution)
    symbols = sorted(set().union(set(), *[sp.sympify(x).free_symbols for row in entries for x in row]) - {s}, key=str)
    values = chosen if chosen is not None else numbers_for(symbols, seed)
    numeric = [[sp.sympify(x).subs(values) for x in row] for row in entries]
    result = sp.Poly(determinant(numeric), s)
    if result.is_zero:
        return None
    return result.degree(), min(m[0] for m in result.monoms())
