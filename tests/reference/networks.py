"""The networks of the reference results, all kinds of parts and questions."""

import sympy as sp
from make import CASES, Case, GROUND, parsed, s, symbols  # noqa: F401

G = GROUND


def v(a, b=G):
    return ("v", a, b)


def i(part):
    return ("i", part)


# ---- passive parts ---------------------------------------------------------------------------

c = Case("rc_low_pass").parts(("Vs", "in", G), ("R1", "in", "out"), ("C1", "out", G))
c.voltage("H", "out", "Vs").current("I", "C1", "Vs").impedance("Z", "in", without=["Vs"])

c = Case("series_resonance").parts(("Vs", "in", G), ("R1", "in", "a"), ("L1", "a", "b"), ("C1", "b", G))
c.voltage("Hr", "in", "Vs", "a").voltage("Hl", "a", "Vs", "b").voltage("Hc", "b", "Vs")
c.impedance("Y", "in", without=["Vs"], inverse=True)

c = Case("parallel_resonance").parts(("Is", G, "a"), ("R1", "a", G), ("L1", "a", G), ("C1", "a", G))
c.voltage("Z", "a", "Is").current("K", "L1", "Is").current("M", "C1", "Is").impedance("Zp", "a")

c = Case("capacitor_loop").parts(
    ("Vs", "in", G), ("C1", "in", "a"), ("C2", "a", G), ("R1", "a", "b"), ("C3", "b", G), ("R2", "a", "in")
)
c.voltage("H", "a", "Vs").voltage("H3", "b", "Vs").current("I", "C1", "Vs")

c = Case("inductor_cut_set").parts(
    ("Vs", "in", G), ("R1", "in", "a"), ("L1", "a", "m"), ("L2", "m", "b"), ("L3", "m", G), ("R2", "b", G)
)
c.voltage("H", "b", "Vs").voltage("Hm", "m", "Vs").current("K", "L3", "Vs")

c = Case("static_charge").parts(("Vs", "in", G), ("C1", "in", "a"), ("R1", "a", "b"), ("C2", "b", "c"), ("R2", "c", G))
c.voltage("H", "b", "Vs").voltage("Hc", "c", "Vs")

c = Case("static_flux").parts(("Is", G, "a"), ("L1", "a", G), ("L2", "a", G), ("R1", "a", "b"), ("L3", "b", G))
c.current("K1", "L1", "Is").current("K3", "L3", "Is").voltage("Z", "a", "Is")

c = Case("rc_ladder").text("n0 -Vs- ground", "for k = 1 .. 5", "  n{k-1} -R{k}- n{k} -C{k}- ground", "end")
c.silent("Vs", "n0", G)
for k in range(1, 6):
    c.silent(f"R{k}", f"n{k-1}", f"n{k}")
    c.silent(f"C{k}", f"n{k}", G)
c.voltage("H", "n5", "Vs").voltage("H3", "n3", "Vs")

c = Case("lc_ladder").parts(
    ("Vs", "in", G),
    ("R1", "in", "a"),
    ("C1", "a", G),
    ("L2", "a", "b"),
    ("C3", "b", G),
    ("L4", "b", "c"),
    ("C5", "c", G),
    ("R2", "c", G),
)
c.voltage("H", "c", "Vs").impedance("Z", "a", without=["R1", "Vs"]).current("I", "R1", "Vs")

c = Case("trap_ladder").parts(
    ("Vs", "in", G),
    ("R1", "in", "a"),
    ("C1", "a", G),
    ("L2", "a", "b"),
    ("C2", "a", "b"),
    ("C3", "b", G),
    ("R2", "b", G),
)
c.voltage("H", "b", "Vs").impedance("Z", "b")

c = Case("bridged_t").parts(("Vs", "in", G), ("C1", "in", "m"), ("C2", "m", "out"), ("R2", "m", G), ("R1", "in", "out"))
c.part("RL", "out", G).voltage("H", "out", "Vs").impedance("Z", "out", "in")

c = Case("twin_t").parts(
    ("Vs", "in", G),
    ("R1", "in", "a"),
    ("R2", "a", "out"),
    ("C3", "a", G),
    ("C1", "in", "b"),
    ("C2", "b", "out"),
    ("R3", "b", G),
)
c.voltage("H", "out", "Vs").impedance("Zo", "out")

c = Case("lattice").parts(
    ("Vs", "a", G), ("L1", "a", "c"), ("L2", G, "d"), ("C1", "a", "d"), ("C2", G, "c"), ("RL", "c", "d")
)
c.voltage("H", "c", "Vs", "d").impedance("Z", "a", without=["Vs"])

c = Case("bridge").parts(
    ("Vs", "in", G), ("R1", "in", "a"), ("C1", "a", G), ("L2", "in", "b"), ("R2", "b", G), ("R5", "a", "b")
)
c.voltage("H", "a", "Vs", "b").current("K", "R5", "Vs").transfer("X", "Vs", (1, v("a")), (-2, v("b")), (sp.Symbol("R2"), i("R5")))
c.impedance("Z", "a", "b", without=["R5"])

c = Case("rc_grid").parts(
    ("Vs", "in", G),
    ("R1", "in", "a"),
    ("R2", "a", "b"),
    ("R3", "a", "c"),
    ("R4", "b", "d"),
    ("R5", "c", "d"),
    ("C1", "a", G),
    ("C2", "b", G),
    ("C3", "c", G),
    ("C4", "d", G),
)
c.voltage("H", "d", "Vs")

c = Case("groups").text("in -Vs- ground", "in -((R1 + (C1 || (R2 + L1))) || C2)- out -(R3 || C3)- ground")
c.silent("Vs", "in", G)
c.silent("R1", "in", "x1")
c.silent("C1", "x1", "out")
c.silent("R2", "x1", "x2")
c.silent("L1", "x2", "out")
c.silent("C2", "in", "out")
c.silent("R3", "out", G)
c.silent("C3", "out", G)
c.voltage("H", "out", "Vs").current("K", "L1", "Vs")

c = Case("anonymous_nodes").text("in -Vs- ground", "in -R1- . -L1- out -C1- . -R2- ground", "out -- tap -R3- gnd")
c.silent("Vs", "in", G)
c.silent("R1", "in", "x1")
c.silent("L1", "x1", "out")
c.silent("C1", "out", "x2")
c.silent("R2", "x2", G)
c.silent("R3", "out", G)
c.voltage("H", "out", "Vs").current("K", "C1", "Vs")

c = Case("general_one_ports").declare("k a b")
a, b, k = symbols("a b k")
c.part("Vs", "in", G).part("Z1", "in", "x", a + 1 / (b * s)).part("Y2", "x", G, k * s / (1 + b * s)).part("R1", "x", G)
c.voltage("H", "x", "Vs").impedance("Z", "in", without=["Vs"])

c = Case("bare_one_ports").parts(("Vs", "in", G), ("Z1", "in", "x"), ("Y2", "x", G), ("C1", "x", G))
c.voltage("H", "x", "Vs")

c = Case("improper").parts(("Is", G, "a"), ("L1", "a", "b"), ("R1", "b", G), ("C1", "b", "c"), ("L2", "c", G))
c.voltage("Z", "a", "Is").voltage("Zl", "a", "Is", "b")

c = Case("meter_current").text("a -m1- b").parts(("Vs", "in", G), ("R1", "in", "a"), ("C1", "b", G), ("L1", "b", G))
c.silent("m1", "a", "b", kind="meter")
c.current("K", "m1", "Vs").current("S", "Vs", "Vs")

# ---- controlled sources ------------------------------------------------------------------------

mu, gm, r, beta = symbols("mu gm r beta")

c = Case("voltage_by_voltage").declare("mu").parts(("Vs", "in", G), ("R1", "in", "a"), ("C1", "a", "out"))
c.controlled("V2", "x", G, (-mu, v("a"))).parts(("R2", "x", "out"), ("C2", "out", G))
c.voltage("H", "out", "Vs").return_ratio("T", "V2").impedance("Z", "in", without=["Vs"])

c = Case("current_by_voltage").declare("gm").parts(("Vs", "in", G), ("R1", "in", "a"), ("C1", "a", "b"), ("R2", "b", G))
c.controlled("I2", "b", G, (gm, v("a", "b"))).part("C2", "a", G)
c.voltage("H", "b", "Vs").return_ratio("T", "I2").impedance("Z", "b")

c = Case("voltage_by_resistor_current").declare("r").parts(
    ("Vs", "in", G), ("R1", "in", "a"), ("C1", "a", G), ("L2", "x", "b"), ("R2", "b", G)
)
c.controlled("V2", "x", "a", (r, i("R1")))
c.voltage("H", "b", "Vs").current("K", "L2", "Vs")

c = Case("current_by_capacitor_current").declare("beta").parts(
    ("Vs", "in", G), ("R1", "in", "a"), ("C1", "a", G), ("R2", "b", G), ("C2", "b", "a")
)
c.controlled("I2", "b", G, (beta, i("C1")))
c.voltage("H", "b", "Vs").return_ratio("T", "I2")

c = Case("current_by_inductor_current").declare("beta").parts(
    ("Vs", "in", G), ("R1", "in", "a"), ("L1", "a", G), ("R2", "b", G), ("C2", "b", "a")
)
c.controlled("I2", G, "b", (beta, i("L1")))
c.voltage("H", "b", "Vs").current("K", "L1", "Vs")

c = Case("voltage_by_source_current").declare("r").parts(("Vs", "in", G), ("R1", "in", "a"), ("C1", "a", G), ("R2", "b", "a"))
c.controlled("V2", "b", G, (r, i("Vs")))
c.voltage("H", "a", "Vs").return_ratio("T", "V2")

c = Case("several_controls").declare("mu gm r").parts(
    ("Vs", "in", G), ("R1", "in", "a"), ("C1", "a", "b"), ("R2", "b", G), ("R3", "c", "b")
)
c.controlled("V2", "c", G, (mu, v("a")), (-2, v("b", "in")), (r, i("R1")))
c.controlled("I3", "a", G, (gm, v("c", "a")))
c.voltage("H", "b", "Vs").voltage("Ha", "a", "Vs")

c = Case("control_with_s").declare("k T").parts(("Vs", "in", G), ("R1", "in", "a"), ("C1", "a", "b"))
k, T = symbols("k T")
c.controlled("V2", "b", G, (-k / (1 + s * T), v("a")))
c.voltage("H", "a", "Vs").voltage("Hb", "b", "Vs").return_ratio("T2", "V2")

c = Case("two_loops").declare("mu gm").parts(
    ("Vs", "in", G), ("R1", "in", "a"), ("C1", "a", G), ("R2", "b", "c"), ("C2", "c", G), ("R3", "c", "a")
)
c.controlled("V2", "b", G, (-mu, v("a"))).controlled("I2", "a", G, (gm, v("c")))
c.voltage("H", "c", "Vs").return_ratio("T1", "V2").return_ratio("T2", "I2")

# ---- amplifiers ------------------------------------------------------------------------------

c = Case("ideal_inverter").parts(("Vs", "in", G), ("R1", "in", "x"), ("C1", "in", "x"), ("R2", "x", "y"), ("C2", "y", "out"))
c.device("U1", "opamp", "+ ground - x out out").part("RL", "out", G)
c.voltage("H", "out", "Vs").impedance("Z", "in", without=["Vs"])

c = Case("follower_low_pass").parts(
    ("Vs", "in", G), ("R1", "in", "a"), ("R2", "a", "b"), ("C2", "b", G), ("C1", "a", "out")
)
c.device("U1", "opamp", "+ b - out out out")
c.voltage("H", "out", "Vs").voltage("Ha", "a", "Vs").impedance("Z", "in", without=["Vs"])

A0, Ta, rin, rout = symbols("A0 Ta rin0 rout0")
c = Case("one_pole_amplifier").declare("A0 Ta").parts(("Vs", "in", G), ("R1", "in", "x"), ("R2", "x", "out"), ("C1", "x", G))
c.device("U1", "opamp", "+ ground - x out out", gain=A0 / (1 + s * Ta))
c.voltage("H", "out", "Vs").return_ratio("T", "U1")

c = Case("amplifier_with_resistances").declare("A0 rin0 rout0").parts(
    ("Vs", "in", G), ("R1", "in", "x"), ("R2", "x", "out"), ("C2", "x", "out"), ("CL", "out", G)
)
c.device("U1", "opamp", "+ ground - x out out", gain=A0, rin=rin, rout=rout)
c.voltage("H", "out", "Vs").return_ratio("T", "U1").impedance("Z", "out")

c = Case("state_variable_loop").parts(
    ("Vs", "in", G),
    ("R1", "in", "x"),
    ("R2", "lp", "x"),
    ("R3", "hp", "x"),
    ("R4", "bp", "y"),
    ("R5", "y", G),
    ("R6", "hp", "u"),
    ("C1", "u", "bp"),
    ("R7", "bp", "w"),
    ("C2", "w", "lp"),
)
c.device("U1", "opamp", "+ y - x out hp").device("U2", "opamp", "+ ground - u out bp")
c.device("U3", "opamp", "+ ground - w out lp")
c.voltage("Hl", "lp", "Vs").voltage("Hb", "bp", "Vs").voltage("Hh", "hp", "Vs")

c = Case("impedance_converter").parts(
    ("R1", "a", "b"), ("R2", "b", "c"), ("C3", "c", "d"), ("R4", "d", "e"), ("C5", "e", G)
)
c.device("U1", "opamp", "+ a - c out d").device("U2", "opamp", "+ e - c out b")
c.impedance("Z", "a")

c = Case("current_source_with_bridge").parts(
    ("Vs", "in", G), ("R1", G, "m"), ("R2", "m", "out"), ("R3", "in", "x"), ("R4", "x", "out"), ("CL", "x", G)
)
c.device("U1", "opamp", "+ x - m out out")
c.voltage("H", "x", "Vs").impedance("Y", "x", inverse=True)

c = Case("difference_amplifier").text("drive Vd, Vc")
half = sp.Rational(1, 2)
c.driven("Vp", "p", G, Vc=1, Vd=half).driven("Vn", "n", G, Vc=1, Vd=-half)
c.parts(("R1", "n", "m"), ("R2", "m", "out"), ("R3", "p", "q"), ("R4", "q", G), ("C2", "m", "out"))
c.device("U1", "opamp", "+ q - m out out")
c.voltage("Ad", "out", "Vd").voltage("Ac", "out", "Vc")
c.function("CMRR", "Ad / Ac", lambda f: f["Ad"] / f["Ac"])

c = Case("differential_outputs").declare("A0 Ta").text("drive Vd").driven("Vp", "p", G, Vd=half).driven("Vn", "n", G, Vd=-half)
c.parts(("R1", "p", "x"), ("R2", "n", "y"), ("R3", "x", "b"), ("C3", "x", "b"), ("R4", "y", "a"), ("C4", "y", "a"))
c.device("U1", "diffamp", "+ x - y out+ a out- b", gain=A0 / (1 + s * Ta))
c.voltage("H", "a", "Vd", "b").voltage("Ha", "a", "Vd")

c = Case("buffer_with_gain").declare("K").parts(
    ("Vs", "in", G), ("C1", "in", "a"), ("C2", "a", "b"), ("R2", "b", G), ("R1", "a", "out")
)
c.device("U1", "buffer", "in b out out", gain=sp.Symbol("K"))
c.voltage("H", "out", "Vs").return_ratio("T", "U1")

c = Case("bootstrapped_capacitor").parts(("Vs", "in", G), ("R1", "in", "a"), ("C1", "a", "out"), ("R2", "a", G))
c.device("U1", "buffer", "in a out out")
c.voltage("H", "out", "Vs").return_ratio("T", "U1").impedance("Z", "a")

c = Case("buffered_sections").parts(("Vs", "in", G), ("R1", "in", "a"), ("C1", "a", G), ("R2", "b", "c"), ("C2", "c", G))
c.device("U1", "buffer", "in a out b")
c.voltage("H", "a", "Vs").voltage("Hc", "c", "Vs")

c = Case("transconductor_biquad").parts(("Vs", "in", G), ("C1", "a", G), ("C2", "b", G), ("R1", "a", G))
c.device("G1", "transconductor", "+ in - b out a").device("G2", "transconductor", "+ a - ground out b")
c.voltage("H", "b", "Vs").voltage("Ha", "a", "Vs")

c = Case("nullor_stage").parts(("Vs", "in", G), ("R1", "x", G), ("C1", "x", G), ("R2", "out", G), ("L2", "out", G))
c.device("N1", "nullor", "+ in - x p out q x")
c.voltage("H", "out", "Vs")

c = Case("conveyor_chain").declare("p").parts(("Vs", "in", G), ("R1", "x", G), ("C1", "z", G), ("R2", "z", "in"))
c.device("U1", "conveyor", "x x y in z z", polarity=sp.Symbol("p"))
c.voltage("H", "z", "Vs").impedance("Z", "in", without=["Vs"])

c = Case("conveyor_inductor").parts(("R1", "b", G), ("C1", "z", G), ("R2", "c", G))
c.device("U1", "conveyor", "x b y a z z", polarity=1).device("U2", "conveyor", "x c y z z a", polarity=-1)
c.impedance("Z", "a")

# ---- two-ports ---------------------------------------------------------------------------------

n, g = symbols("n g")
c = Case("transformer_coupled").declare("n").parts(
    ("Vs", "in", G), ("R1", "in", "a"), ("L1", "a", G), ("C2", "b", G), ("R2", "b", G)
)
c.device("T1", "transformer", "p1 a p2 ground s1 b s2 ground", ratio=n)
c.voltage("H", "b", "Vs").impedance("Z", "a", without=["R1"])

c = Case("autotransformer").parts(("Vs", "in", G), ("R1", "in", "a"), ("R2", "b", G), ("C2", "b", G))
c.device("T1", "transformer", "p1 a p2 b s1 b s2 ground", ratio=sp.Rational(3, 2))
c.voltage("H", "b", "Vs")

c = Case("gyrator_filter").declare("g").parts(("Vs", "in", G), ("R1", "in", "a"), ("C1", "a", G), ("C2", "b", G), ("R2", "b", G))
c.device("G1", "gyrator", "p1 a p2 ground s1 b s2 ground", g=g)
c.voltage("H", "a", "Vs").voltage("Hb", "b", "Vs")

M12, k12 = symbols("M12 k12")
c = Case("coupled_by_mutual").declare("M12").parts(
    ("Vs", "in", G), ("R1", "in", "a"), ("L1", "a", G), ("L2", "b", G), ("R2", "b", G), ("C2", "b", G)
)
c.coupling("T1", "L1", "L2", M=M12)
c.voltage("H", "b", "Vs").current("K", "L1", "Vs").impedance("Z", "a", without=["R1", "Vs"])

c = Case("coupled_by_factor").declare("k12").parts(
    ("Vs", "in", G), ("R1", "in", "a"), ("L1", "a", G), ("L2", "b", G), ("R2", "b", G)
)
c.coupling("T1", "L1", "L2", k=k12)
c.voltage("H", "b", "Vs").impedance("Z", "a", without=["R1", "Vs"])

M13, M23 = symbols("M13 M23")
c = Case("three_coils").declare("M12 M13 M23").parts(
    ("Vs", "in", G), ("R1", "in", "a"), ("L1", "a", G), ("L2", "b", G), ("R2", "b", G), ("L3", G, "d"), ("R3", "d", G)
)
c.coupling("T1", "L1", "L2", M=M12).coupling("T2", "L1", "L3", M=M13).coupling("T3", "L2", "L3", M=M23)
c.voltage("H2", "b", "Vs").voltage("H3", "d", "Vs")

c = Case("series_aiding_coils").declare("M12").parts(("Vs", "in", G), ("L1", "in", "m"), ("L2", "m", "out"), ("R1", "out", G))
c.coupling("T1", "L1", "L2", M=M12)
c.voltage("H", "out", "Vs").voltage("Hm", "m", "Vs")

# ---- transistors and valves --------------------------------------------------------------------

names = symbols("g1 p1 c1 u1 b1 o1")
g1, p1, c1, u1, b1, o1 = names
c = Case("transistor_complete").declare("g1 p1 c1 u1 b1 o1").parts(("Vs", "in", G), ("RS", "in", "b"), ("RL", "c", G))
c.device("Q1", "bjt", "b b c c e ground", gm=g1, rpi=p1, cpi=c1, cmu=u1, rb=b1, ro=o1)
c.voltage("H", "c", "Vs").impedance("Z", "c")

c = Case("transistor_own_symbols").parts(("Vs", "in", G), ("RS", "in", "b"), ("RE", "e", G), ("RC", "c", G), ("CE", "e", G))
c.device("Q1", "bjt", "b b c c e e")
c.voltage("H", "c", "Vs").voltage("He", "e", "Vs").return_ratio("T", "Q1")

b0 = sp.Symbol("b0")
c = Case("transistor_with_beta").declare("g1 b0").parts(("Vs", "in", G), ("RS", "in", "b"), ("RE", "out", G), ("CL", "out", G))
c.device("Q1", "bjt", "b b c ground e out", gm=g1, beta=b0)
c.voltage("H", "out", "Vs").impedance("Z", "out")

c = Case("feedback_pair").parts(
    ("Vs", "in", G),
    ("RS", "in", "b1"),
    ("R1", "c1", G),
    ("R2", "out", G),
    ("RF", "out", "e1"),
    ("RE", "e1", G),
    ("CF", "out", "e1"),
)
c.device("Q1", "bjt", "b b1 c c1 e e1").device("Q2", "bjt", "b c1 c out e ground")
c.voltage("H", "out", "Vs").return_ratio("T", "Q2")

d0, m0, x1, x2, x3, x4 = symbols("d0 m0 x1 x2 x3 x4")
c = Case("field_effect_complete").declare("gm d0 m0 x1 x2 x3 x4").parts(
    ("Vs", "in", G), ("RG", "in", "g"), ("RD", "d", G), ("RS", "so", G)
)
c.device(
    "Q1", "fet", "g g d d s so b ground", gm=gm, gds=d0, gmb=m0, cgs=x1, cgd=x2, cdb=x3, csb=x4
)
c.voltage("H", "d", "Vs")

c = Case("cascode").parts(("Vs", "in", G), ("RG", "in", "g"), ("RD", "out", G), ("C1", "m", G), ("CL", "out", G), ("C2", "g", "m"))
c.device("Q1", "fet", "g g d m s ground").device("Q2", "fet", "g ground d out s m")
c.voltage("H", "out", "Vs").voltage("Hm", "m", "Vs")

c = Case("valve_stage").parts(("Vs", "in", G), ("RG", "in", "g"), ("RA", "a", G), ("RK", "k", G), ("CK", "k", G), ("CA", "a", "g"))
c.device("T1", "triode", "g g a a k k")
c.voltage("H", "a", "Vs").voltage("Hk", "k", "Vs")

ra = sp.Symbol("ra")
c = Case("valve_with_mu").declare("mu ra").parts(("Vs", "in", G), ("RK", "k", G), ("CK", "k", G))
c.device("T1", "triode", "g in a ground k k", mu=mu, ra=ra)
c.voltage("H", "k", "Vs").return_ratio("T", "T1").impedance("Z", "k")

# ---- relations -----------------------------------------------------------------------------------

c = Case("twin_t_matched").declare("R C").parts(
    ("Vs", "in", G),
    ("R1", "in", "a"),
    ("R2", "a", "out"),
    ("C3", "a", G),
    ("C1", "in", "b"),
    ("C2", "b", "out"),
    ("R3", "b", G),
)
for name, value in (("R1", "R"), ("R2", "R"), ("R3", "R/2"), ("C1", "C"), ("C2", "C"), ("C3", "2*C")):
    c.relation(name, value)
c.voltage("H", "out", "Vs")

c = Case("compensated_divider").parts(("Vs", "in", G), ("R1", "in", "out"), ("C1", "in", "out"), ("R2", "out", G), ("C2", "out", G))
c.relation("C1", "R2*C2/R1")
c.voltage("H", "out", "Vs").impedance("Z", "in", without=["Vs"])

c = Case("design_equations").declare("w Q").parts(
    ("Vs", "in", G), ("R1", "in", "a"), ("R2", "a", "b"), ("C2", "b", G), ("C1", "a", "out")
)
c.relation("R2", "R1").relation("C1", "2*Q/(w*R1)").relation("C2", "1/(2*Q*w*R1)")
c.device("U1", "opamp", "+ b - out out out")
c.voltage("H", "out", "Vs")

c = Case("gain_by_relation").parts(
    ("Vs", "in", G), ("R1", "in", "a"), ("R2", "a", "b"), ("C2", "b", G), ("C1", "a", "out"), ("Ra", "m", G), ("Rb", "m", "out")
)
c.relation("R2", "R1").relation("C2", "C1").relation("Rb", "2*Ra - R1^2/(R1 + Ra)")
c.device("U1", "opamp", "+ b - m out out")
c.voltage("H", "out", "Vs")

c = Case("relation_with_number").parts(("Vs", "in", G), ("R1", "in", "out"), ("R2", "out", G), ("C1", "out", G))
c.text("R2 = R1 + 4k7")
c.values[sp.Symbol("R2")] = sp.Symbol("R1") + 4700
c.voltage("H", "out", "Vs")

c = Case("fixed_values").parts(("Vs", "in", G), ("R1", "in", "out"), ("L1", "out", "x"), ("C1", "x", G), ("R2", "out", G))
c.text("R1 = exactly 50 Ω", "C1 = exactly 2n2")
c.values[sp.Symbol("R1")] = sp.Integer(50)
c.values[sp.Symbol("C1")] = sp.Rational(22, 10**10)
c.voltage("H", "out", "Vs")

c = Case("negative_resistance").parts(("Vs", "in", G), ("R1", "in", "a"), ("L1", "a", "b"), ("C1", "b", G), ("R3", "b", G))
c.declare("Rn").relation("R3", "-Rn")
c.voltage("H", "b", "Vs")

c = Case("golden_bridge").parts(("Vs", "in", G), ("R1", "in", "a"), ("R2", "a", G), ("R3", "in", "b"), ("R4", "b", G), ("C5", "a", "b"))
c.relation("R4", "R2*R3/R1")
c.voltage("H", "a", "Vs", "b").voltage("Ha", "a", "Vs")

# ---- questions of other kinds ------------------------------------------------------------------

c = Case("ratio_of_responses").parts(("Is", G, "a"), ("R1", "a", "b"), ("C1", "a", G), ("L2", "b", "c"), ("R3", "c", G), ("C3", "c", G))
c.ratio("F", v("c"), v("a"), "Is").ratio("K", i("L2"), i("R3"), "Is")

c = Case("taken_out").parts(
    ("Vs", "in", G), ("R1", "in", "a"), ("C1", "a", G), ("R2", "a", "b"), ("L2", "b", G), ("RL", "b", G)
)
c.voltage("H", "b", "Vs").voltage("Ho", "b", "Vs", without=["RL"]).voltage("Hc", "a", "Vs", without=["R2", "C1"])
c.impedance("Zo", "b", without=["RL"]).impedance("Y", "b", inverse=True, without=["RL", "L2"])

c = Case("limits").declare("A0").parts(("Vs", "in", G), ("R1", "in", "x"), ("R2", "x", "out"), ("C2", "x", "out"))
c.device("U1", "opamp", "+ ground - x out out", gain=A0)
c.voltage("H", "out", "Vs").return_ratio("T", "U1")
y = sp.Symbol("y")
c.function("Hi", "H with A0 -> infinite", lambda f: sp.cancel(f["H"].subs(A0, 1 / y)).subs(y, 0))
c.function("e", "first_order(H, 1/A0)", lambda f: sp.diff(sp.cancel(f["H"].subs(A0, 1 / y)), y).subs(y, 0) / A0)
c.function("F", "1/(1 + T)", lambda f: 1 / (1 + f["T"]))
c.function("P", "H*F - s*R1/R2", lambda f: f["H"] * f["F"] - s * sp.Symbol("R1") / sp.Symbol("R2"))

c = Case("nothing_arrives").parts(("Vs", "in", G), ("R1", "in", "a"), ("C1", "a", G), ("R2", "a", "b"), ("C2", "b", G))
c.transfer("H", "Vs", (1, v("a")), (-1, v("b")), (-1, v("a", "b")))
c.current("K", "C2", "Vs")

c = Case("two_sources").parts(("Va", "a", G), ("Ib", G, "b"), ("R1", "a", "m"), ("L1", "m", "b"), ("C1", "m", G), ("R2", "b", G))
c.voltage("Ha", "m", "Va").voltage("Zb", "m", "Ib").current("K", "Va", "Ib").impedance("Zm", "m")

c = Case("section_twice").text(
    "module section(in, out, com) with R, C",
    "  in -R1- out -C1- com",
    "  R1 = R",
    "  C1 = C",
    "end",
    "in -Vs- ground",
    "A1 is section(in, out mid, com ground) with R = Ra, C = Ca",
    "A2 is section(in mid, out, com ground) with R = 2*Ra, C = Cb",
    "free Ra, Ca, Cb",
)
c.silent("Vs", "in", G)
for name, value in (("A1.R1", "Ra"), ("A1.C1", "Ca"), ("A2.R1", "2*Ra"), ("A2.C1", "Cb")):
    c.values[sp.Symbol(name)] = parsed(value)
c.silent("A1.R1", "in", "mid", kind="R")
c.silent("A1.C1", "mid", G, kind="C")
c.silent("A2.R1", "mid", "out", kind="R")
c.silent("A2.C1", "out", G, kind="C")
c.voltage("H", "out", "Vs")
