//! Everything a run asks, in order: network, functions, claims.

use std::collections::{BTreeMap, BTreeSet};

use crate::algebra::{Fraction, Polynomial, Symbol, SymbolTable};
use crate::analysis::cancellation::{audit, whole};
use crate::analysis::claim::Evidence;
use crate::analysis::couplings::Couplings;
use crate::analysis::drops::{drops, undecided};
use crate::analysis::effect;
use crate::analysis::form::{Forms, forms, time_constants};
use crate::analysis::functions;
use crate::analysis::knowledge::Knowledge;
use crate::analysis::meaning;
use crate::analysis::nest::nested;
use crate::analysis::normal::leading_sign;
use crate::analysis::order::ledger;
use crate::analysis::relations::Substitution;
use crate::analysis::report::{
    ClaimReport, Drop, Expanded, Failure, Formula, FunctionReport, NetworkOrder, Report, Verdict,
    Wanted,
};
use crate::analysis::solve::{Setting, Solved, natural_polynomial, network_degrees, solve};
use crate::analysis::states;
use crate::analysis::witness;
use crate::budget::{Budget, Exceeded};
use crate::diagnostic::{Diagnostic, Severity};
use crate::network::{Ask, Assertion, Network};

/// Terms of a formula that nobody asked for; it still tells where the order drops.
const UNASKED: usize = 10_000;

/// Width of a diagram where no formula is asked for; values modulo a prime are quicker beyond.
const UNASKED_WIDTH: u64 = 1 << 12;

/// Answers what is wanted of a network.
///
/// # Errors
/// [`Failure::Unusable`] when the network or a question has no unique solution, [`Failure::Budget`]
/// when not even the orders could be decided, [`Failure::Witness`] when the independent check
/// disagrees.
pub fn answer(network: &Network, wanted: &Wanted, budget: &Budget) -> Result<Report, Failure> {
    let budget = &if wanted.formulas || wanted.claims {
        *budget
    } else {
        budget.with_width(UNASKED_WIDTH)
    };
    let plain = Substitution::new(network, budget)?;
    if let Some(id) = plain.undefined.first() {
        let relation = network.relation(*id);
        return Err(unusable(
            Diagnostic::error(relation.place, "this relation divides by zero")
                .help("under the other relations its divisor is zero for all values"),
        ));
    }
    let mut rooted = plain.clone();
    let mut table = network.symbols().clone();
    let couplings = match Couplings::new(network, &mut rooted, &mut table, budget)? {
        Ok(couplings) => couplings,
        Err(irrational) => {
            let coupling = &network.couplings()[irrational.coupling];
            return Err(unusable(
                Diagnostic::error(
                    coupling.place,
                    format!(
                        "the mutual inductance of {} is no rational function of the values",
                        coupling.name
                    ),
                )
                .help("give it as M, or relate the coils by a square: L2 = n^2*L1"),
            ));
        }
    };
    let (degree, valuation) = match network_degrees(network, &[], budget)? {
        Ok(found) => found,
        Err(error) => return Err(unusable(*error)),
    };
    let order = ledger(network, &[], degree, valuation);
    let expansion = if wanted.formulas || wanted.claims {
        *budget
    } else {
        budget.with_terms(UNASKED)
    };
    let run = Run {
        setting: Setting {
            network,
            rooted: &rooted,
            couplings: &couplings,
            budget,
            expansion: &expansion,
        },
        knowledge: Knowledge::new(network, &plain, budget)?,
        plain: &plain,
        table: &table,
        order: &order,
    };
    if wanted.states {
        let states = states::answer(&run.setting, &order, wanted)?;
        return Ok(Report {
            order: order.clone(),
            results: Vec::new(),
            claims: Vec::new(),
            states: Some(states),
            warnings: Vec::new(),
        });
    }
    run.all(wanted)
}

fn unusable(error: Diagnostic) -> Failure {
    Failure::Unusable(vec![error])
}

/// A function of which nothing was found within the budget.
fn undecided_function(network: &Network, index: usize, exceeded: Exceeded) -> FunctionReport {
    FunctionReport {
        name: network.questions()[index].name.clone(),
        question: index,
        formula: Formula::OverBudget(exceeded),
        forms: Forms::default(),
        order: 0,
        numerator_order: 0,
        network: None,
        hidden: None,
        zero: false,
        no_effect: Vec::new(),
        drops_when: Vec::new(),
        origin_when: Vec::new(),
        cancellations: None,
        unaudited: None,
        nominals_missing: Vec::new(),
        relied_on: Vec::new(),
        checked_points: 0,
    }
}

struct Run<'a> {
    setting: Setting<'a>,
    knowledge: Knowledge<'a>,
    plain: &'a Substitution,
    table: &'a SymbolTable,
    order: &'a NetworkOrder,
}

impl Run<'_> {
    fn all(&self, wanted: &Wanted) -> Result<Report, Failure> {
        let network = self.setting.network;
        let mut known: BTreeMap<Symbol, Fraction> = BTreeMap::new();
        let mut reports: Vec<FunctionReport> = Vec::new();
        let mut errors = Vec::new();
        let needed = functions::needed(network, wanted);
        for (index, question) in network.questions().iter().enumerate() {
            if !needed.contains(&index) {
                continue;
            }
            let solved = match solve(&self.setting, question) {
                Ok(solved) => solved,
                Err(exceeded) => {
                    reports.push(undecided_function(network, index, exceeded));
                    continue;
                }
            };
            let made = match solved {
                Some(Ok(solved)) => self.of_network(index, &solved, &mut known)?,
                Some(Err(error)) => {
                    errors.push(*error);
                    continue;
                }
                None => match self.of_functions(index, &mut known) {
                    Ok(report) => report,
                    Err(Failure::Unusable(list)) => {
                        errors.extend(list);
                        continue;
                    }
                    Err(other) => return Err(other),
                },
            };
            reports.push(made);
        }
        if !errors.is_empty() {
            return Err(Failure::Unusable(errors));
        }
        let (claims, warnings) = if wanted.claims {
            self.claims(&known, &reports)?
        } else {
            (Vec::new(), Vec::new())
        };
        let mut results: Vec<FunctionReport> = reports
            .into_iter()
            .filter(|report| functions::is_wanted(&report.name, wanted))
            .collect();
        if wanted.forms {
            for report in &mut results {
                if let Formula::Expanded(expanded) = &report.formula {
                    let mut found = forms(network, expanded);
                    if wanted.time_constants {
                        let sums = time_constants(network, report, expanded, self.setting.budget)?;
                        found.time_constants = Some(sums);
                    }
                    report.forms = found;
                }
            }
        }
        Ok(Report {
            order: self.order.clone(),
            results,
            claims,
            states: None,
            warnings,
        })
    }

    fn of_network(
        &self,
        index: usize,
        solved: &Solved,
        known: &mut BTreeMap<Symbol, Fraction>,
    ) -> Result<FunctionReport, Failure> {
        let network = self.setting.network;
        let question = &network.questions()[index];
        let degrees = solved.degrees;
        let mut report = FunctionReport {
            name: question.name.clone(),
            question: index,
            formula: Formula::Expanded(Expanded {
                numerator: vec![Polynomial::zero()],
                denominator: vec![Polynomial::one()],
            }),
            forms: Forms::default(),
            order: degrees.order,
            numerator_order: degrees.numerator,
            network: Some(degrees.network),
            hidden: Some(degrees.network.saturating_sub(degrees.order)),
            zero: degrees.zero,
            no_effect: Vec::new(),
            drops_when: Vec::new(),
            origin_when: Vec::new(),
            cancellations: Some(Vec::new()),
            unaudited: None,
            nominals_missing: Vec::new(),
            relied_on: Vec::new(),
            checked_points: 0,
        };
        match &solved.function {
            Ok(reduced) => {
                known.insert(question.symbol, reduced.fraction.clone());
                report.formula = self.written(&reduced.fraction);
                report.checked_points =
                    witness::check(network, index, known, self.setting.couplings)
                        .map_err(Failure::Witness)?;
                self.conditions(&mut report);
            }
            Err(exceeded) => {
                report.formula = nested(&self.setting, &solved.pairing, degrees.common)
                    .map_or(Formula::OverBudget(*exceeded), Formula::Nested);
            }
        }
        match audit(&self.setting, self.plain, self.table, index, solved) {
            Ok(audited) => {
                report.nominals_missing = audited.nominals_missing;
                report.cancellations = Some(audited.cancellations);
            }
            Err(exceeded) => {
                report.cancellations = whole(&self.setting, self.table, solved);
                report.unaudited = Some(exceeded);
            }
        }
        // A part of a factor that cancels has its place there.
        if report.cancellations.is_some() || report.hidden == Some(0) {
            report.no_effect =
                effect::without_effect(network, index, &report, self.setting.couplings);
        }
        Ok(report)
    }

    fn of_functions(
        &self,
        index: usize,
        known: &mut BTreeMap<Symbol, Fraction>,
    ) -> Result<FunctionReport, Failure> {
        let network = self.setting.network;
        let question = &network.questions()[index];
        let value = functions::evaluate(
            network,
            question,
            known,
            self.setting.rooted,
            self.setting.budget,
        );
        let unknown = Exceeded::Terms(self.setting.budget.limits().terms);
        let mut report = undecided_function(network, index, unknown);
        match value {
            Ok(Some(fraction)) => {
                report.order = fraction.denominator().degree(Symbol::S);
                report.numerator_order = fraction.numerator().degree(Symbol::S);
                report.zero = fraction.is_zero();
                report.formula = self.written(&fraction);
                known.insert(question.symbol, fraction);
                if matches!(question.ask, Ask::Function(_)) {
                    report.checked_points =
                        witness::check(network, index, known, self.setting.couplings)
                            .map_err(Failure::Witness)?;
                }
                self.conditions(&mut report);
            }
            Ok(None) => {}
            Err(functions::Trouble::Exceeded(exceeded)) => {
                report.formula = Formula::OverBudget(exceeded);
            }
            Err(functions::Trouble::Wrong(error)) => return Err(unusable(*error)),
        }
        Ok(report)
    }

    /// Where the order drops, with what the proofs rest on.
    fn conditions(&self, report: &mut FunctionReport) {
        let Formula::Expanded(expanded) = &report.formula else {
            return;
        };
        if report.zero {
            return;
        }
        let Some(leading) = expanded.denominator.last() else {
            return;
        };
        let (conditions, mut relied_on) = self.vanishing(leading);
        report.drops_when = conditions;
        let lowest = expanded.denominator.iter().find(|part| !part.is_zero());
        if let Some(lowest) = lowest.filter(|_| report.order > 0) {
            let (conditions, more) = self.vanishing(lowest);
            report.origin_when = conditions;
            relied_on.extend(more);
        }
        report.relied_on = relied_on.into_iter().collect();
    }

    /// Where a coefficient vanishes, with what the proofs rest on.
    fn vanishing(&self, coefficient: &Polynomial) -> (Vec<Drop>, BTreeSet<String>) {
        let names = self.setting.network.symbols();
        drops(coefficient, &self.knowledge, names, self.setting.budget)
            .unwrap_or_else(|_| (vec![undecided(coefficient, self.table)], BTreeSet::new()))
    }

    /// A function as it is written: without roots, coprime with numbers, leading sign positive.
    fn written(&self, fraction: &Fraction) -> Formula {
        match self.expanded(fraction) {
            Ok(expanded) => Formula::Expanded(expanded),
            Err(exceeded) => Formula::OverBudget(exceeded),
        }
    }

    fn expanded(&self, fraction: &Fraction) -> Result<Expanded, Exceeded> {
        let (mut numerator, mut denominator) = self
            .setting
            .couplings
            .written(fraction.numerator(), fraction.denominator());
        if numerator.is_zero() {
            return Ok(Expanded {
                numerator: vec![Polynomial::zero()],
                denominator: vec![Polynomial::one()],
            });
        }
        let number = numerator.content().gcd(&denominator.content());
        let monomial = numerator
            .monomial_content()
            .gcd(&denominator.monomial_content());
        let common = Polynomial::monomial(number, monomial);
        if !common.is_one() {
            numerator = numerator.div_exact(&common).unwrap_or(numerator);
            denominator = denominator.div_exact(&common).unwrap_or(denominator);
        }
        let names = self.table;
        let first = denominator
            .coefficients(Symbol::S)
            .into_iter()
            .find(|part| !part.is_zero())
            .unwrap_or_default();
        if leading_sign(&first, names) < 0 {
            numerator = -numerator;
            denominator = -denominator;
        }
        Ok(Expanded {
            numerator: numerator.coefficients(Symbol::S),
            denominator: denominator.coefficients(Symbol::S),
        })
    }

    fn claims(
        &self,
        known: &BTreeMap<Symbol, Fraction>,
        reports: &[FunctionReport],
    ) -> Result<(Vec<ClaimReport>, Vec<Diagnostic>), Failure> {
        let network = self.setting.network;
        let meaningless = meaning::meaningless(network, reports);
        if !meaningless.is_empty() {
            return Err(Failure::Unusable(meaningless));
        }
        let report_of = |symbol: Symbol| {
            let index = network.question_of(symbol)?;
            reports.iter().find(|report| report.question == index)
        };
        let function = |symbol: Symbol| known.get(&symbol).cloned();
        let natural = network
            .claims()
            .iter()
            .any(|claim| matches!(claim.assertion, Assertion::Stable { .. }))
            .then(|| natural_polynomial(&self.setting).ok().flatten())
            .flatten();
        let evidence = Evidence {
            network,
            substitution: self.setting.rooted,
            couplings: self.setting.couplings,
            knowledge: &self.knowledge,
            natural: natural.as_ref(),
            order: self.order,
            function: &function,
            report: &report_of,
            budget: self.setting.budget,
        };
        let (mut claims, mut warnings) = (Vec::new(), Vec::new());
        for (index, claim) in network.claims().iter().enumerate() {
            let decided = evidence.decide(index, claim)?;
            if decided.holds == Verdict::Yes && evidence.at_terminals_only(claim)? {
                let message = "stable at the terminals only: the network has a natural frequency \
                               that grows and does not show here";
                let warning = Diagnostic {
                    severity: Severity::Warning,
                    ..Diagnostic::error(claim.place, message)
                        .help("claim stable(network) says under which conditions it does not grow")
                };
                warnings.push(warning);
            }
            claims.push(decided);
        }
        Ok((claims, warnings))
    }
}
