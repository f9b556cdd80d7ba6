use super::*;
use crate::algebra::{Fraction, PrimeField, UnivariateRing};
use crate::analysis::determinant::Determinant;
use crate::analysis::point::{Choice, Point};
use crate::analysis::setup::{Frame, Insertion};
use crate::budget::Budget;
use crate::network::oracle::degrees;
use crate::network::scatter::{Dice, active, passive};
use crate::network::sketch::Sketch;
use crate::network::{Element, Origin, RelationId};

fn of(sketch: Sketch) -> (NetworkOrder, Network) {
    let network = sketch.finish();
    let (degree, valuation) = degrees(&network, &[], 7).expect("a unique solution");
    (ledger(&network, &[], degree, valuation), network)
}

fn names(network: &Network, lists: &[Vec<ElementId>]) -> Vec<String> {
    let name = |id: &ElementId| network.element(*id).name.clone();
    let joined = |list: &Vec<ElementId>| list.iter().map(name).collect::<Vec<_>>().join(" ");
    lists.iter().map(joined).collect()
}

fn clauses(order: &NetworkOrder) -> Vec<&str> {
    let evidence = order.constraint_evidence.iter();
    evidence.map(|piece| piece.clause.as_str()).collect()
}

/// The identity that a ledger states, and what it may never show.
fn adds_up(order: &NetworkOrder) {
    let taken = order.capacitor_loops.len() + order.inductor_cutsets.len();
    let states = order.reactive.len() + order.device_states as usize;
    assert_eq!(
        states - taken - order.constraints as usize,
        order.network as usize
    );
    let sets = order.static_sets.len() + order.integrators as usize;
    assert_eq!(sets, order.static_modes as usize);
    assert!(order.constraint_evidence.len() <= order.constraints as usize);
}

#[test]
fn a_divider_of_capacitors_at_a_source() {
    let (order, network) = of(Sketch::of(
        "Vs in ground; C1 in a; C2 a ground; R1 a b; C3 b ground",
    ));
    adds_up(&order);
    assert_eq!(names(&network, &order.capacitor_loops), ["C1 C2 Vs"]);
    assert_eq!((order.network, order.constraints), (2, 0));
    assert_eq!((order.static_modes, order.static_sets.len()), (1, 1));
}

#[test]
fn capacitors_around_a_meter_and_in_parallel() {
    let (order, network) = of(Sketch::of(
        "Is ground a; R1 a ground; C1 a ground; C2 a b; M1 b ground; C3 c ground; C4 c ground; R2 c a",
    ));
    adds_up(&order);
    assert_eq!(
        names(&network, &order.capacitor_loops),
        ["C1 C2 M1", "C3 C4"]
    );
    assert_eq!(order.network, 2);
}

#[test]
fn inductors_in_series_and_a_star_with_a_current_source() {
    let (order, network) = of(Sketch::of(
        "Vs in ground; L1 in a; L2 a b; R1 b ground; L3 b c; L4 c ground; Is ground c",
    ));
    adds_up(&order);
    assert_eq!(
        names(&network, &order.inductor_cutsets),
        ["L1 L2", "L3 L4 Is"]
    );
    assert_eq!((order.network, order.constraints), (2, 0));
}

#[test]
fn charge_and_flux_that_stay() {
    let (order, network) = of(Sketch::of(
        "Vs in ground; C1 in a; C2 a ground; R1 in b; L1 b ground; L2 b ground; M1 b d; L3 d ground",
    ));
    adds_up(&order);
    let members: Vec<Vec<ElementId>> = order
        .static_sets
        .iter()
        .map(|set| set.members.clone())
        .collect();
    assert_eq!(names(&network, &members), ["C1 C2", "L1 L2", "L1 L3 M1"]);
    assert_eq!(order.static_sets[0].stored, Stored::Charge);
    assert_eq!(order.static_sets[1].stored, Stored::Flux);
    assert_eq!((order.integrators, order.moving()), (0, 1));
}

#[test]
fn a_shorted_inductor_keeps_its_flux_and_a_shorted_capacitor_nothing() {
    let (order, network) = of(Sketch::of("R1 a ground; L1 a a; C1 a a"));
    adds_up(&order);
    assert_eq!(names(&network, &order.capacitor_loops), ["C1"]);
    assert_eq!((order.network, order.static_modes), (1, 1));
    assert_eq!(order.static_sets.len(), 1);
}

#[test]
fn parts_taken_out_leave_the_ledger() {
    let sketch = Sketch::of("Vs in ground; C1 in ground; R1 in a; C2 a ground");
    let source = sketch.id("Vs");
    let network = sketch.finish();
    let (degree, valuation) = degrees(&network, &[source], 3).unwrap();
    let order = ledger(&network, &[source], degree, valuation);
    adds_up(&order);
    assert!(order.capacitor_loops.is_empty());
    assert_eq!(
        (order.network, order.static_modes, order.integrators),
        (2, 1, 0)
    );
}

#[test]
fn an_island_held_by_sources_alone_has_its_own_cut_sets() {
    let network =
        Sketch::of("R0 c ground; I1 a ground; I2 b ground; L1 a b; R1 a a2; R2 b b2").finish();
    let order = ledger(&network, &[], 0, 0);
    assert_eq!(names(&network, &order.inductor_cutsets), ["L1"]);
}

#[test]
fn an_integrator_is_no_static_set() {
    let sketch = Sketch::of("Vs in ground; R1 in a; C1 a out; RL out ground");
    let (order, _) = of(sketch.opamp("U1", "ground", "a", "out"));
    adds_up(&order);
    assert_eq!(
        (order.network, order.static_modes, order.integrators),
        (1, 1, 1)
    );
    assert!(order.static_sets.is_empty());
}

#[test]
fn outputs_set_capacitor_voltages() {
    let sketch = Sketch::of("Vs in ground; R1 in a; C1 a ground; C2 b ground; C3 b c; C4 c ground")
        .by_voltage("V2", ["b", "ground"], ["a", "ground"]);
    let (order, _) = of(sketch);
    adds_up(&order);
    assert_eq!((order.network, order.constraints), (2, 1));
    assert_eq!(clauses(&order), ["V2 sets the voltage of C2"]);
}

#[test]
fn a_loop_through_an_output_ties_capacitors() {
    let sketch = Sketch::of("Vs in ground; R1 in a; C1 a ground; C3 b c; C4 c ground; R2 c ground")
        .opamp("U1", "a", "b", "b");
    let (order, network) = of(sketch);
    adds_up(&order);
    assert_eq!((order.network, order.constraints), (2, 1));
    assert_eq!(
        clauses(&order),
        ["U1 ties the voltages of C3 and C4 together"]
    );
    assert_eq!(order.constraint_evidence[0].names, ["C3", "C4", "U1"]);
    assert!(names(&network, &order.capacitor_loops).is_empty());
}

#[test]
fn equal_inputs_hold_a_capacitor() {
    let sketch = Sketch::of("Vs in ground; R1 in a; C1 a ground; R2 a out; RL out ground")
        .opamp("U1", "ground", "a", "out");
    let (order, _) = of(sketch);
    adds_up(&order);
    assert_eq!((order.network, order.constraints), (0, 1));
    assert_eq!(clauses(&order), ["U1 holds the voltage of C1"]);
}

#[test]
fn a_capacitor_bootstrapped_by_a_follower_is_no_state() {
    let sketch = Sketch::of("Vs in ground; R1 in a; C1 a b; RL b ground").follower("V2", "a", "b");
    let (order, _) = of(sketch);
    adds_up(&order);
    assert_eq!((order.network, order.constraints), (0, 1));
    assert_eq!(clauses(&order), ["V2 holds the voltage of C1"]);
}

#[test]
fn a_controlled_current_sets_an_inductor() {
    let sketch = Sketch::of("Vs in ground; R1 in a; C1 a ground; L1 b ground; R2 c ground; L2 b c")
        .by_voltage("I2", ["b", "ground"], ["a", "ground"]);
    let (order, _) = of(sketch);
    adds_up(&order);
    assert_eq!((order.network, order.constraints), (2, 1));
    assert_eq!(
        clauses(&order),
        ["I2 ties the currents of L1 and L2 together"]
    );
}

#[test]
fn a_tight_coupling_takes_one_state() {
    let network = "Vs in ground; R1 in a; L1 a ground; L2 b ground; R2 b ground";
    let (order, _) = of(Sketch::of(network).coupling("T1", ["L1", "L2"], true));
    adds_up(&order);
    assert_eq!((order.network, order.constraints), (1, 1));
    assert_eq!(
        clauses(&order),
        ["T1 with k = 1 gives L1 and L2 one common flux"]
    );
    let (order, _) = of(Sketch::of(network).coupling("T1", ["L1", "L2"], false));
    assert_eq!((order.network, order.constraints), (2, 0));
}

#[test]
fn a_tight_coupling_is_not_counted_as_passive() {
    let network = "Vs in ground; R1 in a; L1 a ground; L2 b ground; R2 b ground";
    let draw = |tight| Sketch::of(network).coupling("T1", ["L1", "L2"], tight);
    assert_eq!(passive_order(&draw(true).finish()), None);
    let counted = passive_order(&draw(false).finish()).unwrap();
    assert_eq!((counted.order, counted.static_modes), (2, 0));
}

#[test]
fn relations_that_take_a_state_are_found_by_release() {
    let sketch = Sketch::of("R1 a ground; C1 a ground; C2 a ground");
    let network = sketch
        .relation(&[("C2", Fraction::zero())], Origin::Part)
        .relation(&[("R1", Fraction::one())], Origin::Part)
        .finish();
    let degree = |id: RelationId| Some(if id.index() == 0 { 1 } else { 0 });
    let found = released(&network, 0, 1, degree);
    assert_eq!(found.len(), 1);
    assert_eq!(found[0].clause, "without relation the order would be 1");
}

#[test]
fn a_transformer_ties_capacitors_and_inductors() {
    let sketch = Sketch::of("Vs in ground; R1 in a; C1 a ground; C2 b ground; R2 b ground");
    let (order, _) = of(sketch.transformer("T1", ["a", "ground"], ["b", "ground"]));
    adds_up(&order);
    assert_eq!((order.network, order.constraints), (1, 1));
    assert_eq!(
        clauses(&order),
        ["T1 ties the voltages of C1 and C2 together"]
    );
    let sketch = Sketch::of("Vs in ground; L1 in a; L2 b c; R2 c ground");
    let (order, _) = of(sketch.transformer("T1", ["a", "ground"], ["b", "ground"]));
    adds_up(&order);
    assert_eq!((order.network, order.constraints), (1, 1));
    assert_eq!(
        clauses(&order),
        ["T1 ties the currents of L1 and L2 together"]
    );
}

#[test]
fn a_driver_of_a_sensed_supply_breaks_no_count() {
    let sketch = Sketch::of("Vs a ground; C1 a ground; C2 b a; R1 b ground").by_current(
        "I2",
        ["b", "ground"],
        "Vs",
    );
    let (order, _) = of(sketch);
    adds_up(&order);
}

/// What remains of the count when all chosen parts are open or short, as ranks: independent of
/// loops and trees.
fn rank(network: &Network, chosen: impl Fn(&Element) -> bool) -> usize {
    let mut rows: Vec<Vec<i128>> = network
        .elements()
        .filter(|(_, element)| chosen(element))
        .map(|(_, element)| {
            let port = element.port().unwrap();
            let mut row = vec![0; network.node_count()];
            row[port.from.index()] += 1;
            row[port.to.index()] -= 1;
            row
        })
        .collect();
    let mut rank = 0;
    for column in 0..network.node_count() {
        let Some(pivot) = (rank..rows.len()).find(|&row| rows[row][column] != 0) else {
            continue;
        };
        rows.swap(rank, pivot);
        let (done, below) = rows.split_at_mut(rank + 1);
        let head = &done[rank];
        for row in below {
            let (up, down) = (head[column], row[column]);
            for (entry, above) in row.iter_mut().zip(head) {
                *entry = *entry * up - above * down;
            }
        }
        rank += 1;
    }
    rank
}

#[test]
fn random_passive_networks_against_ranks_and_determinants() {
    let mut solved = 0;
    for seed in 0..1500 {
        let network = passive(&mut Dice(seed << 24)).finish();
        let Some((degree, valuation)) = degrees(&network, &[], seed) else {
            assert_eq!(passive_order(&network), None, "seed {seed}");
            continue;
        };
        solved += 1;
        let order = ledger(&network, &[], degree, valuation);
        adds_up(&order);
        assert_eq!(
            (order.constraints, order.integrators),
            (0, 0),
            "seed {seed}"
        );
        let counted = passive_order(&network).unwrap();
        assert_eq!((counted.order, counted.static_modes), (degree, valuation));
        let capacitor = |element: &Element| matches!(element.kind, Kind::Capacitor(..));
        let members = network
            .elements()
            .filter(|(_, part)| capacitor(part) || part.is_short())
            .count();
        let independent = rank(&network, |part| capacitor(part) || part.is_short());
        assert_eq!(order.capacitor_loops.len(), members - independent);
        let opens =
            |part: &Element| matches!(part.kind, Kind::Inductor(..)) || part.is_current_source();
        let whole = rank(&network, |_| true);
        let rest = rank(&network, |part| !opens(part));
        assert_eq!(order.inductor_cutsets.len(), whole - rest);
        evidence_is_real(&network, &order);
    }
    assert!(solved > 300, "{solved}");
}

/// Every loop closes and every cut-set parts the network.
fn evidence_is_real(network: &Network, order: &NetworkOrder) {
    for around in &order.capacitor_loops {
        let inside = |part: &Element| {
            around
                .iter()
                .any(|&id| network.element(id).name == part.name)
        };
        assert_eq!(rank(network, inside), around.len() - 1);
        let first = &network.element(around[0]).kind;
        assert!(matches!(first, Kind::Capacitor(..)));
    }
    for cut in &order.inductor_cutsets {
        let outside = |part: &Element| cut.iter().all(|&id| network.element(id).name != part.name);
        assert_eq!(rank(network, outside), rank(network, |_| true) - 1);
    }
}

#[test]
fn random_active_networks_keep_to_the_bounds() {
    let (mut explained, mut taken) = (0, 0);
    for seed in 0..6000 {
        let network = active(&mut Dice(seed << 24)).finish();
        let Some((degree, valuation)) = degrees(&network, &[], seed) else {
            continue;
        };
        let order = ledger(&network, &[], degree, valuation);
        adds_up(&order);
        assert!(
            degrees(&network, &[], seed + 1) == Some((degree, valuation)),
            "degrees are those of almost all values"
        );
        let whole = constraints::evidence(
            &Parts::new(&network, &[]),
            &order.capacitor_loops,
            &order.inductor_cutsets,
            u32::MAX,
        );
        assert!(
            whole.len() <= order.constraints as usize,
            "seed {seed}: each piece of evidence stands for a state of its own: {whole:?}"
        );
        explained += order.constraint_evidence.len();
        taken += order.constraints as usize;
    }
    assert!(
        taken > 100 && 4 * explained > 3 * taken,
        "{explained} of {taken}"
    );
}

#[test]
fn a_long_ladder_with_a_loop_in_each_section_is_counted_fast() {
    let sections = 20_000;
    let mut parts = String::from("Vs n0 ground;");
    for k in 0..sections {
        let next = k + 1;
        parts.push_str(&format!(
            "C{k} n{k} n{next}; CG{k} n{next} ground; R{k} n{next} ground;"
        ));
    }
    let network = Sketch::of(&parts).finish();
    let counted = passive_order(&network).unwrap();
    assert_eq!(counted.order, sections);
    let order = ledger(&network, &[], counted.order, counted.static_modes);
    adds_up(&order);
    assert!(order.capacitor_loops.iter().all(|around| around.len() == 3));
}

/// Degree and lowest power by the determinant over spanning trees, with parts taken out.
fn by_trees(network: &Network, without: &[ElementId], seed: u64) -> Option<(u32, u32)> {
    let field = PrimeField::default_prime();
    let choice = Choice {
        seed,
        shift: 0,
        released: &|_| false,
        salt: None,
    };
    let point = (0..20).find_map(|more| {
        let seed = seed + 1000 * more;
        Point::new(network, &field, &Choice { seed, ..choice })
    })?;
    let frame = Frame::without(without);
    let built = Determinant::build(network, &frame, &Insertion::None, &Budget::unlimited());
    let ring = UnivariateRing { field };
    let value = built.ok()?.ok()?.value(&ring, &point).ok()?;
    let coefficients = value.coefficients();
    let high = coefficients.iter().rposition(|&c| c != 0)?;
    let low = coefficients.iter().position(|&c| c != 0)?;
    Some((number(high), number(low)))
}

#[test]
fn ledgers_fit_determinants_with_parts_taken_out() {
    let (mut solved, mut passive_solved) = (0, 0);
    for seed in 0..3000 {
        let mut dice = Dice(seed << 24);
        let drawn = if seed % 2 == 0 {
            active(&mut dice)
        } else {
            passive(&mut dice)
        };
        let network = drawn.finish();
        let count = network.elements().len();
        let without: Vec<ElementId> = (0..2).map(|_| ElementId::at(dice.roll(count))).collect();
        let Some((degree, valuation)) = by_trees(&network, &without, seed) else {
            continue;
        };
        let order = ledger(&network, &without, degree, valuation);
        adds_up(&order);
        solved += 1;
        if seed % 2 == 1 {
            passive_solved += 1;
            assert_eq!(
                (order.constraints, order.integrators),
                (0, 0),
                "seed {seed}"
            );
        }
    }
    assert!(
        solved > 500 && passive_solved > 300,
        "{solved} {passive_solved}"
    );
}
