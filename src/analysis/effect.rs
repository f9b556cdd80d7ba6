//! Parts whose value changes nothing in a function.

use std::collections::BTreeSet;

use crate::analysis::couplings::Couplings;
use crate::analysis::equations::point::Numbers;
use crate::analysis::equations::{Residue, solve};
use crate::analysis::report::{FunctionReport, NoEffect};
use crate::analysis::witness;
use crate::network::{Ask, ElementId, Kind, Network, Quantity, Value};

/// R, L, C, Z, Y parts that change nothing when changed alone with every relation released, and that
/// no cancelled factor names. Two random points, modulo a prime.
pub(crate) fn without_effect(
    network: &Network,
    question: usize,
    report: &FunctionReport,
    couplings: &Couplings,
) -> Vec<NoEffect> {
    let asked = &network.questions()[question];
    if matches!(
        asked.ask,
        Ask::Function(_) | Ask::Limit { .. } | Ask::FirstOrder { .. }
    ) {
        return Vec::new();
    }
    let named: BTreeSet<&String> = report
        .cancellations
        .iter()
        .flatten()
        .flat_map(|cancellation| &cancellation.parts)
        .collect();
    let seeds = [51_u64, 52];
    if let Some(idle) = by_adjoint(network, question, &seeds, couplings) {
        return idle
            .into_iter()
            .filter(|&id| !named.contains(&network.element(id).name))
            .map(|element| NoEffect {
                element,
                reason: reason(network, element),
            })
            .collect();
    }
    let base: Vec<Option<Residue>> = seeds
        .iter()
        .map(|&seed| {
            let numbers = Numbers::independent(network, couplings, seed, None);
            witness::value(network, question, &numbers, 0)
        })
        .collect();
    if base.iter().all(Option::is_none) {
        return Vec::new();
    }
    let mut found = Vec::new();
    for (id, element) in network.elements() {
        let Some(Value::Symbol(symbol)) = element.value() else {
            continue;
        };
        if asked.without.contains(&id) || named.contains(&element.name) {
            continue;
        }
        let same = seeds.iter().zip(&base).all(|(&seed, base)| {
            let numbers = Numbers::independent(network, couplings, seed, Some(*symbol));
            witness::value(network, question, &numbers, 0) == *base
        });
        if same {
            found.push(NoEffect {
                element: id,
                reason: reason(network, id),
            });
        }
    }
    found
}

/// One solution and one adjoint solution tell all parts at once: a change of one value adds a matrix
/// of rank one, and changes the response exactly when the adjoint at the part's row and the part's own
/// current (R, L, Z) or voltage (C, Y) are both other than zero. `None` for questions of another form.
fn by_adjoint(
    network: &Network,
    question: usize,
    seeds: &[u64],
    couplings: &Couplings,
) -> Option<Vec<ElementId>> {
    let asked = &network.questions()[question];
    let mut active: BTreeSet<ElementId> = BTreeSet::new();
    for &seed in seeds {
        let numbers = Numbers::independent(network, couplings, seed, None);
        let (equations, right, response) = witness::system(network, question, &numbers)?;
        let solution = solve(&equations.rows, &[right]);
        let adjoint = solve(&equations.transposed(), &[response]);
        let (x, lambda) = (solution.solutions.first()?, adjoint.solutions.first()?);
        for (id, element) in network.elements() {
            let Some((row, voltage)) = equations.branch_of(id, x) else {
                continue;
            };
            let own = match element.kind {
                Kind::Resistor(..) | Kind::Inductor(..) | Kind::Impedance(..) => x[row],
                Kind::Capacitor(..) | Kind::Conductance(..) | Kind::Admittance(..) => voltage,
                _ => continue,
            };
            if !own.mul(lambda[row]).is_zero() {
                active.insert(id);
            }
        }
    }
    Some(
        network
            .elements()
            .filter(|(id, element)| {
                matches!(element.value(), Some(Value::Symbol(_)))
                    && !asked.without.contains(id)
                    && !active.contains(id)
            })
            .map(|(id, _)| id)
            .collect(),
    )
}

/// Why a part has no effect, where the wiring shows it at once.
fn reason(network: &Network, part: ElementId) -> Option<String> {
    let port = network.element(part).port()?;
    for (id, element) in network.elements() {
        if id == part {
            continue;
        }
        if let (Kind::Source(source), Some(other)) = (&element.kind, element.port()) {
            let same = (other.from, other.to) == (port.from, port.to)
                || (other.to, other.from) == (port.from, port.to);
            if same && source.quantity == Quantity::Voltage {
                return Some(format!("it lies across {}", element.name));
            }
        }
    }
    let ends = |node| {
        network
            .elements()
            .filter(|(_, element)| {
                element
                    .port()
                    .is_some_and(|port| port.from == node || port.to == node)
            })
            .map(|(id, _)| id)
            .collect::<Vec<_>>()
    };
    for node in [port.from, port.to] {
        if node == crate::network::NodeId::GROUND {
            continue;
        }
        if let [first, second] = ends(node).as_slice() {
            let other = if *first == part { *second } else { *first };
            let is_sensed = network.devices().iter().any(|device| {
                device
                    .terminals
                    .iter()
                    .any(|(_, terminal)| *terminal == node)
            });
            if let Kind::Source(source) = &network.element(other).kind
                && source.quantity == Quantity::Current
                && !is_sensed
            {
                return Some(format!(
                    "{} drives its current",
                    network.element(other).name
                ));
            }
        }
    }
    network.devices().iter().find_map(|device| {
        let held = device
            .elements
            .iter()
            .any(|&id| match &network.element(id).kind {
                Kind::Amplifier {
                    output, rout: None, ..
                }
                | Kind::Nullor { output, .. } => {
                    (output.from == port.from && output.to == port.to)
                        || (output.from == port.to && output.to == port.from)
                }
                Kind::Source(source) => {
                    source.quantity == Quantity::Voltage
                        && ((source.port.from == port.from && source.port.to == port.to)
                            || (source.port.from == port.to && source.port.to == port.from))
                }
                _ => false,
            });
        held.then(|| format!("its node is held by {}", device.name))
    })
}
