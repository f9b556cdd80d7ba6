//! One question answered: determinants, degrees, the reduced function.

use crate::algebra::gcd::gcd;
use crate::algebra::univariate::Univariate;
use crate::algebra::{Fraction, Polynomial, PolynomialRing, Symbol};
use crate::analysis::couplings::Couplings;
use crate::analysis::order::passive_order;
use crate::analysis::pairing::{Paired, Pairing, Sample};
use crate::analysis::relations::Substitution;
use crate::analysis::setup::Frame;
use crate::analysis::singular::{self, Case};
use crate::analysis::symbolic::Symbolic;
use crate::budget::{Budget, Exceeded};
use crate::diagnostic::Diagnostic;
use crate::network::{Ask, ElementId, Kind, Network, NodeId, Port, Quantity, Question};

/// Seed of the points at which degrees are decided; two are compared.
pub(crate) const SEED: u64 = 20_261_201;

/// Nodes from which on the order of a passive network is counted by its graph alone.
const LARGE: usize = 2000;

/// What is common to all questions of a run.
pub(crate) struct Setting<'a> {
    /// The network.
    pub(crate) network: &'a Network,
    /// Relations put in, inductances of couplings by factor as squares of their roots.
    pub(crate) rooted: &'a Substitution,
    /// Mutual inductances.
    pub(crate) couplings: &'a Couplings,
    /// Bounds.
    pub(crate) budget: &'a Budget,
    /// Bounds for formulas; smaller where none is asked for.
    pub(crate) expansion: &'a Budget,
}

/// A question with its determinants and degrees.
pub(crate) struct Solved {
    /// The determinants.
    pub(crate) pairing: Box<Pairing>,
    /// Degrees, decided modulo a prime.
    pub(crate) degrees: Degrees,
    /// The reduced function, when it was completed.
    pub(crate) function: Result<Reduced, Exceeded>,
}

/// Degrees of a question.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) struct Degrees {
    /// Order of the network the question is asked in.
    pub(crate) network: u32,
    /// Degree of the cancelled denominator.
    pub(crate) order: u32,
    /// Degree of the cancelled numerator.
    pub(crate) numerator: u32,
    /// Degree in s of what cancels.
    pub(crate) common: u32,
    /// The numerator vanishes identically.
    pub(crate) zero: bool,
}

/// A function in lowest terms, and what was cancelled.
pub(crate) struct Reduced {
    /// The function.
    pub(crate) fraction: Fraction,
    /// The factor in s that cancelled, primitive; 1 if none.
    pub(crate) common: Polynomial,
}

fn degree(polynomial: &Univariate) -> u32 {
    polynomial
        .degree()
        .and_then(|degree| u32::try_from(degree).ok())
        .unwrap_or(0)
}

/// Degree and multiplicity of s = 0 of the determinant of a network with parts taken out.
pub(crate) fn network_degrees(
    network: &Network,
    without: &[ElementId],
    budget: &Budget,
) -> Result<Result<(u32, u32), Box<Diagnostic>>, Exceeded> {
    let explain = |met: &[ElementId]| {
        Box::new(singular::explain(&Case {
            network,
            without,
            touched: &[],
            short: None,
            met,
            question: None,
        }))
    };
    // Passive networks with independent values need no determinant.
    if without.is_empty()
        && network.relations().len() == 0
        && let Some(passive) = passive_order(network)
        && network.node_count() > LARGE
    {
        return Ok(Ok((passive.order, passive.static_modes)));
    }
    let pairing = match Pairing::network(network, without, budget)? {
        Paired::Pairing(pairing) => pairing,
        Paired::Singular(singular) => return Ok(Err(explain(&singular.elements))),
    };
    if pairing.is_large() {
        let [first, second] = [SEED, SEED + 1000].map(|seed| pairing.extremes(network, seed));
        let (Some(first), Some(second)) = (first, second) else {
            return Err(Exceeded::States(budget.limits().states));
        };
        let (a, b) = (first.denominator, second.denominator);
        return Ok(Ok((a.0.max(b.0), a.1.min(b.1))));
    }
    let mut best: Option<(u32, u32)> = None;
    for seed in [SEED, SEED + 1000] {
        let Some(sample) = pairing.lucky(network, seed, 0, &|_| false) else {
            continue;
        };
        let Some(low) = sample.network.valuation() else {
            continue;
        };
        let found = (degree(&sample.network), u32::try_from(low).unwrap_or(0));
        best = Some(best.map_or(found, |(high, low)| (high.max(found.0), low.min(found.1))));
    }
    Ok(best.ok_or_else(|| explain(&[])))
}

/// The polynomial of the natural frequencies, relations put in.
pub(crate) fn natural_polynomial(setting: &Setting<'_>) -> Result<Option<Polynomial>, Exceeded> {
    let determinant = natural_determinant(setting)?;
    Ok(determinant.map(|it| setting.couplings.written(&it, &Polynomial::one()).0))
}

/// The same with the roots of inductances that couplings by factor bring in.
pub(crate) fn natural_determinant(setting: &Setting<'_>) -> Result<Option<Polynomial>, Exceeded> {
    let budget = setting.budget;
    let Paired::Pairing(pairing) = Pairing::network(setting.network, &[], budget)? else {
        return Ok(None);
    };
    let symbolic = Symbolic::new(setting.network, setting.rooted, setting.couplings, budget)?;
    let ring = PolynomialRing { budget };
    let (_, determinant) = pairing.expand(&ring, &symbolic)?;
    Ok(Some(determinant))
}

/// Builds the determinants of a question and decides its degrees; `None` for functions of functions.
pub(crate) fn solve(
    setting: &Setting<'_>,
    question: &Question,
) -> Result<Option<Result<Solved, Box<Diagnostic>>>, Exceeded> {
    let network = setting.network;
    if let Ask::Impedance(port) = &question.ask
        && let Some(error) = shorted(network, *port, question)
    {
        return Ok(Some(Err(Box::new(error))));
    }
    let short = match &question.ask {
        Ask::Admittance(port) => Some(*port),
        _ => None,
    };
    let touched = Frame::of(&question.ask, &question.without)
        .map(|frame| frame.ports)
        .unwrap_or_default();
    let explain = |met: &[ElementId]| {
        if matches!(question.ask, Ask::ReturnRatio(_)) {
            return Box::new(
                Diagnostic::error(
                    question.place,
                    "without this gain the network has no unique solution: the return ratio is not defined",
                )
                .help("ask the ratio around another gain"),
            );
        }
        Box::new(singular::explain(&Case {
            network,
            without: &question.without,
            touched: &touched,
            short,
            met,
            question: Some(question.place),
        }))
    };
    let paired = Pairing::of(network, &question.ask, &question.without, setting.budget)?;
    let pairing = match paired {
        None => return Ok(None),
        Some(Paired::Singular(singular)) => return Ok(Some(Err(explain(&singular.elements)))),
        Some(Paired::Pairing(pairing)) => pairing,
    };
    if pairing.is_large() {
        let exceeded = Exceeded::States(setting.budget.limits().states);
        let degrees = large_degrees(network, &pairing).ok_or(exceeded)?;
        return Ok(Some(Ok(Solved {
            pairing,
            degrees,
            function: Err(Exceeded::Terms(setting.budget.limits().terms)),
        })));
    }
    let samples: Vec<Sample> = [SEED, SEED + 1000]
        .into_iter()
        .filter_map(|seed| pairing.lucky(network, seed, 0, &|_| false))
        .filter(|sample| !sample.denominator.is_zero())
        .collect();
    let Some(degrees) = degrees(&pairing, &samples) else {
        return Ok(Some(Err(explain(&[]))));
    };
    let function = reduce(setting, &pairing, degrees);
    Ok(Some(Ok(Solved {
        pairing,
        degrees,
        function,
    })))
}

/// Degrees where polynomials in s are too long: from their ends alone, where the numerator is one
/// power of s, so that the common factor is one, too.
fn large_degrees(network: &Network, pairing: &Pairing) -> Option<Degrees> {
    let found = pairing.extremes(network, SEED)?;
    if pairing.extremes(network, SEED + 1000)? != found {
        return None;
    }
    let (all, low) = found.denominator;
    let Some((above, power)) = found.numerator else {
        return Some(Degrees {
            network: all,
            order: 0,
            numerator: 0,
            common: all,
            zero: true,
        });
    };
    let common = power.min(low);
    (above == power).then_some(Degrees {
        network: all,
        order: all - common,
        numerator: above - common,
        common,
        zero: false,
    })
}

/// The best of the samples: highest degrees, lowest degree of the common factor.
fn degrees(pairing: &Pairing, samples: &[Sample]) -> Option<Degrees> {
    let field = pairing.field();
    samples
        .iter()
        .map(|sample| {
            let zero = sample.numerator.is_zero();
            let common = degree(&sample.numerator.gcd(&sample.denominator, field));
            let all = degree(&sample.denominator);
            let network = degree(&sample.network);
            if zero {
                return Degrees {
                    network,
                    order: 0,
                    numerator: 0,
                    common: all,
                    zero,
                };
            }
            Degrees {
                network,
                order: all - common,
                numerator: degree(&sample.numerator) - common,
                common,
                zero,
            }
        })
        .max_by_key(|degrees| (!degrees.zero, degrees.order, degrees.numerator))
}

/// Expands and cancels.
fn reduce(setting: &Setting<'_>, pairing: &Pairing, degrees: Degrees) -> Result<Reduced, Exceeded> {
    if degrees.zero {
        return Ok(Reduced {
            fraction: Fraction::zero(),
            common: Polynomial::one(),
        });
    }
    let budget = setting.expansion;
    pairing.writable(setting.network, budget)?;
    let symbolic = Symbolic::new(setting.network, setting.rooted, setting.couplings, budget)?;
    let ring = PolynomialRing { budget };
    let (numerator, denominator) = pairing.expand(&ring, &symbolic)?;
    let common = gcd(&numerator, &denominator, budget)?;
    let divide = |polynomial: &Polynomial| {
        polynomial
            .div_exact(&common)
            .unwrap_or_else(|| polynomial.clone())
    };
    let fraction = Fraction::new(divide(&numerator), divide(&denominator), budget)?;
    Ok(Reduced {
        fraction: fraction.unwrap_or_else(Fraction::zero),
        common: part_in_s(&common, budget)?,
    })
}

/// A polynomial without the factors that do not hold s.
pub(crate) fn part_in_s(polynomial: &Polynomial, budget: &Budget) -> Result<Polynomial, Exceeded> {
    if polynomial.degree(Symbol::S) == 0 {
        return Ok(Polynomial::one());
    }
    let mut content = Polynomial::zero();
    for part in polynomial.coefficients(Symbol::S) {
        content = gcd(&content, &part, budget)?;
        if content.is_one() {
            break;
        }
    }
    Ok(polynomial
        .div_exact(&content)
        .unwrap_or_else(|| polynomial.clone()))
}

/// An impedance asked across a source that shorts its port.
fn shorted(network: &Network, port: Port, question: &Question) -> Option<Diagnostic> {
    let mut neighbours: Vec<Vec<(NodeId, Option<ElementId>)>> =
        vec![Vec::new(); network.node_count()];
    for (id, element) in network.elements() {
        if question.without.contains(&id) {
            continue;
        }
        let conducts = match &element.kind {
            Kind::Source(source) => {
                source.quantity == Quantity::Voltage && source.controls.is_empty()
            }
            Kind::Meter(_) => true,
            _ => false,
        };
        if let (true, Some(port)) = (conducts, element.port()) {
            let is_source = matches!(element.kind, Kind::Source(_));
            let source = is_source.then_some(id);
            neighbours[port.from.index()].push((port.to, source));
            neighbours[port.to.index()].push((port.from, source));
        }
    }
    let mut seen = vec![false; network.node_count()];
    let mut stack = vec![(port.from, Vec::new())];
    while let Some((node, sources)) = stack.pop() {
        if std::mem::replace(&mut seen[node.index()], true) {
            continue;
        }
        if node == port.to {
            let names: Vec<&str> = sources
                .iter()
                .map(|&id: &ElementId| network.element(id).name.as_str())
                .collect();
            let message = if names.is_empty() {
                "a meter shorts this port".to_owned()
            } else {
                format!("{} shorts this port when it is zeroed", names.join(", "))
            };
            let help = names.first().map_or_else(
                || "ask between other nodes".to_owned(),
                |name| format!("add without {name}"),
            );
            return Some(Diagnostic::error(question.place, message).help(help));
        }
        for &(next, source) in &neighbours[node.index()] {
            let mut way = sources.clone();
            way.extend(source);
            stack.push((next, way));
        }
    }
    None
}
