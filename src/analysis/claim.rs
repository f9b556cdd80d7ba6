//! Claims proven or refuted by exact means.

use crate::algebra::{Fraction, Integer, Monomial, Polynomial, Rational, Symbol};
use crate::analysis::couplings::Couplings;
use crate::analysis::knowledge::Knowledge;
use crate::analysis::relations::Substitution;
use crate::analysis::report::{
    Cancellation, ClaimReport, Finding, FunctionReport, NetworkOrder, Verdict,
};
use crate::analysis::stability::decide;
use crate::budget::{Budget, Exceeded};
use crate::network::{
    Ask, Assertion, CancellationClass, Claim, ClaimedValue, Network, Side, Subject,
};

/// What claims are held against.
pub(crate) struct Evidence<'a> {
    /// The network.
    pub(crate) network: &'a Network,
    /// Its relations.
    pub(crate) substitution: &'a Substitution,
    /// Mutual inductances of couplings given by their factor.
    pub(crate) couplings: &'a Couplings,
    /// Its signs.
    pub(crate) knowledge: &'a Knowledge<'a>,
    /// The polynomial of its natural frequencies, when it was completed.
    pub(crate) natural: Option<&'a Polynomial>,
    /// Its order.
    pub(crate) order: &'a NetworkOrder,
    /// Each derived function that is known in closed form.
    pub(crate) function: &'a dyn Fn(Symbol) -> Option<Fraction>,
    /// Each derived function's degrees and cancellations.
    pub(crate) report: &'a dyn Fn(Symbol) -> Option<&'a FunctionReport>,
    /// Bounds.
    pub(crate) budget: &'a Budget,
}

/// A verdict with its evidence, before it is tied to its claim.
type Decision = (Verdict, Vec<Finding>);

impl Evidence<'_> {
    /// Decides one claim.
    pub(crate) fn decide(&self, index: usize, claim: &Claim) -> Result<ClaimReport, Exceeded> {
        let (holds, findings) = match &claim.assertion {
            Assertion::Equals(function, expected) => self.equals(*function, expected)?,
            Assertion::Same(first, second) => match (self.function)(*second) {
                Some(other) => self.compare(*first, Some(other))?,
                None => not_known(),
            },
            Assertion::Order(subject, claimed) => self.order_of(*subject, claimed),
            Assertion::Static(claimed) => count(claimed, self.order.static_modes),
            Assertion::Dc(function, claimed) => self.end(*function, claimed, End::Dc)?,
            Assertion::Hf(function, claimed) => self.end(*function, claimed, End::Hf)?,
            Assertion::Coefficient {
                function,
                side,
                power,
                value,
            } => self.coefficient(*function, *side, *power, value)?,
            Assertion::Pole(function, value) => self.root(*function, value, Side::Denominator)?,
            Assertion::Zero(function, value) => self.root(*function, value, Side::Numerator)?,
            Assertion::Cancels(function, classes) => self.cancels(*function, classes),
            Assertion::Stable {
                subject,
                within_tolerance,
            } => {
                let (holds, findings, relied_on) = self.stable(*subject, *within_tolerance)?;
                return Ok(ClaimReport {
                    claim: index,
                    holds,
                    findings,
                    relied_on,
                });
            }
        };
        Ok(ClaimReport {
            claim: index,
            holds,
            findings,
            relied_on: Vec::new(),
        })
    }

    /// An expression of a claim over independent symbols and s.
    fn resolve(&self, expression: &Fraction) -> Result<Option<Fraction>, Exceeded> {
        expression.substitute(
            &|symbol| {
                (self.function)(symbol)
                    .or_else(|| self.couplings.expression(symbol))
                    .or_else(|| Some(self.substitution.value(symbol)))
            },
            self.budget,
        )
    }

    /// Whether every derived function an expression names is known in closed form.
    fn is_known(&self, expression: &Fraction) -> bool {
        expression.symbols().into_iter().all(|symbol| {
            self.network.question_of(symbol).is_none() || (self.function)(symbol).is_some()
        })
    }

    fn equals(&self, function: Symbol, expected: &Fraction) -> Result<Decision, Exceeded> {
        if !self.is_known(expected) {
            return Ok(not_known());
        }
        let resolved = self.resolve(expected)?;
        self.compare(function, resolved)
    }

    fn compare(&self, function: Symbol, claimed: Option<Fraction>) -> Result<Decision, Exceeded> {
        match (self.function)(function) {
            Some(found) => self.judge(found, claimed),
            None => Ok(not_known()),
        }
    }

    /// Compares two reduced fractions; they are equal exactly when they are the same.
    fn judge(&self, found: Fraction, claimed: Option<Fraction>) -> Result<Decision, Exceeded> {
        let Some(claimed) = claimed else {
            return Ok((
                Verdict::No,
                vec![
                    note(
                        "claimed",
                        "an expression that divides by zero under the relations",
                    ),
                    self.formula("found", &found),
                ],
            ));
        };
        if found == claimed {
            return Ok((Verdict::Yes, Vec::new()));
        }
        let difference = claimed.add(&found.neg(), self.budget)?;
        let mut findings = vec![
            self.formula("claimed", &claimed),
            self.formula("found", &found),
            Finding {
                as_product: true,
                ..self.formula("difference", &difference)
            },
        ];
        findings.extend(self.counterexample(&claimed, &found, &difference));
        Ok((Verdict::No, findings))
    }

    /// Allowed values at which the two differ.
    fn counterexample(
        &self,
        claimed: &Fraction,
        found: &Fraction,
        difference: &Fraction,
    ) -> Option<Finding> {
        let mut symbols = difference.symbols();
        for other in [claimed.symbols(), found.symbols()].concat() {
            if !symbols.contains(&other) {
                symbols.push(other);
            }
        }
        symbols.sort_unstable();
        for attempt in 1..60_usize {
            let value = |symbol: Symbol| self.knowledge.trial(symbol, attempt);
            if !self.knowledge.allows(&value) {
                continue;
            }
            let (Some(left), Some(right)) = (claimed.value(&value), found.value(&value)) else {
                continue;
            };
            if left != right {
                let names = self.network.symbols();
                let values: Vec<String> = symbols
                    .iter()
                    .map(|&symbol| format!("{} = {}", names.name(symbol), value(symbol)))
                    .collect();
                let text = format!("claimed {left}, found {right}");
                let label = if values.is_empty() {
                    "values".to_owned()
                } else {
                    format!("at {}", values.join(", "))
                };
                return Some(note(label, text));
            }
        }
        None
    }

    /// A line of evidence with a quotient, written without roots.
    fn formula(&self, label: &str, fraction: &Fraction) -> Finding {
        let pair = self
            .couplings
            .written(fraction.numerator(), fraction.denominator());
        Finding {
            label: label.to_owned(),
            text: None,
            formula: Some(pair),
            as_product: false,
        }
    }

    fn order_of(&self, subject: Subject, claimed: &Rational) -> Decision {
        match subject {
            Subject::Network => count(claimed, self.order.network),
            Subject::Function(function) => match (self.report)(function) {
                Some(report) if report.degrees_known() => count(claimed, report.order),
                _ => not_known(),
            },
        }
    }

    fn end(
        &self,
        function: Symbol,
        claimed: &ClaimedValue,
        end: End,
    ) -> Result<Decision, Exceeded> {
        let Some(known) = (self.function)(function) else {
            return Ok(not_known());
        };
        let found = limit_value(&known, end, self.budget)?;
        match (found, claimed) {
            (None, ClaimedValue::Infinite) => Ok((Verdict::Yes, Vec::new())),
            (None, ClaimedValue::Value(_)) => {
                Ok((Verdict::No, vec![note("found", "it is infinite")]))
            }
            (Some(found), ClaimedValue::Infinite) => Ok((
                Verdict::No,
                vec![note("claimed", "infinite"), self.formula("found", &found)],
            )),
            (Some(found), ClaimedValue::Value(value)) => {
                if !self.is_known(value) {
                    return Ok(not_known());
                }
                let resolved = self.resolve(value)?;
                self.judge(found, resolved)
            }
        }
    }

    fn coefficient(
        &self,
        function: Symbol,
        side: Side,
        power: u32,
        value: &Fraction,
    ) -> Result<Decision, Exceeded> {
        let Some(known) = (self.function)(function) else {
            return Ok(not_known());
        };
        if !self.is_known(value) {
            return Ok(not_known());
        }
        let denominator = known.denominator().coefficients(Symbol::S);
        let Some(unit) = denominator
            .first()
            .filter(|constant| !constant.is_zero())
            .or_else(|| denominator.last())
        else {
            return Ok(not_known());
        };
        let polynomial = match side {
            Side::Numerator => known.numerator(),
            Side::Denominator => known.denominator(),
        };
        let coefficient = polynomial
            .coefficients(Symbol::S)
            .get(power as usize)
            .cloned()
            .unwrap_or_else(Polynomial::zero);
        let Some(found) = Fraction::new(coefficient, unit.clone(), self.budget)? else {
            return Ok(not_known());
        };
        let resolved = self.resolve(value)?;
        self.judge(found, resolved)
    }

    fn root(&self, function: Symbol, value: &Fraction, side: Side) -> Result<Decision, Exceeded> {
        let Some(known) = (self.function)(function) else {
            return Ok(not_known());
        };
        let Some(value) = self.resolve(value)? else {
            return Ok((
                Verdict::No,
                vec![note(
                    "claimed",
                    "an expression that divides by zero under the relations",
                )],
            ));
        };
        let polynomial = match side {
            Side::Numerator => known.numerator(),
            Side::Denominator => known.denominator(),
        };
        let at = Fraction::from(polynomial.clone()).substitute(
            &|symbol| (symbol == Symbol::S).then(|| value.clone()),
            self.budget,
        )?;
        if at.as_ref().is_some_and(Fraction::is_zero) {
            return Ok((Verdict::Yes, Vec::new()));
        }
        let word = match side {
            Side::Numerator => "numerator",
            Side::Denominator => "denominator",
        };
        let mut findings = vec![self.formula("claimed", &value)];
        findings.push(Finding {
            label: word.to_owned(),
            text: None,
            formula: Some((polynomial.clone(), Polynomial::one())),
            as_product: false,
        });
        if let Some(at) = at {
            findings.push(self.formula(&format!("{word} there"), &at));
        }
        Ok((Verdict::No, findings))
    }

    /// The polynomial whose roots decide, or why there is none.
    fn poles(&self, subject: Subject) -> Result<Polynomial, Decision> {
        match subject {
            Subject::Network => match self.natural {
                Some(polynomial) => Ok(polynomial.clone()),
                None => Err(not_known()),
            },
            Subject::Function(function) => {
                let Some(known) = (self.function)(function) else {
                    return Err(not_known());
                };
                let (numerator, denominator) = self
                    .couplings
                    .written(known.numerator(), known.denominator());
                if numerator.degree(Symbol::S) > denominator.degree(Symbol::S) {
                    let text = "it is improper: the numerator has the higher degree";
                    return Err((Verdict::No, vec![note("found", text)]));
                }
                Ok(denominator)
            }
        }
    }

    fn stable(
        &self,
        subject: Subject,
        within_tolerance: bool,
    ) -> Result<(Verdict, Vec<Finding>, Vec<String>), Exceeded> {
        let polynomial = match self.poles(subject) {
            Ok(polynomial) => polynomial,
            Err((verdict, findings)) => return Ok((verdict, findings, Vec::new())),
        };
        let narrowed;
        let knowledge = if within_tolerance {
            narrowed = self.knowledge.within_tolerance();
            &narrowed
        } else {
            self.knowledge
        };
        let found = decide(&polynomial, knowledge, self.budget)?;
        let names = self.network.symbols();
        let mut findings = Vec::new();
        if polynomial.valuation(Symbol::S) > 0 {
            findings.push(note("found", "a pole at s = 0"));
        }
        for condition in &found.open {
            findings.push(Finding {
                label: "only where positive".to_owned(),
                text: None,
                formula: Some((condition.clone(), Polynomial::one())),
                as_product: false,
            });
        }
        if !found.example.is_empty() {
            let values: Vec<String> = found
                .example
                .iter()
                .map(|(symbol, value)| format!("{} = {value}", names.name(*symbol)))
                .collect();
            findings.push(note("not stable at", values.join(", ")));
        }
        if subject == Subject::Network && found.verdict == Verdict::No {
            let mut terminals = true;
            for question in self.network.questions() {
                let (verdict, ..) =
                    self.stable(Subject::Function(question.symbol), within_tolerance)?;
                terminals &= verdict == Verdict::Yes;
            }
            if terminals && !self.network.questions().is_empty() {
                findings.push(note("warning", "stable at the terminals only"));
            }
        }
        Ok((
            found.verdict,
            findings,
            found.relied_on.into_iter().collect(),
        ))
    }

    /// Whether a function that is proven stable stands in a network with a mode that grows: what a
    /// formula does not show.
    pub(crate) fn at_terminals_only(&self, claim: &Claim) -> Result<bool, Exceeded> {
        let Assertion::Stable {
            subject: Subject::Function(function),
            within_tolerance,
        } = claim.assertion
        else {
            return Ok(false);
        };
        let question = self.network.question_of(function);
        let question = question.map(|index| &self.network.questions()[index]);
        let of_whole_network = question.is_some_and(|it| {
            it.without.is_empty() && matches!(it.ask, Ask::Transfer { .. } | Ask::Impedance(_))
        });
        let Some(natural) = self.natural.filter(|_| of_whole_network) else {
            return Ok(false);
        };
        // Charge that stays is no mode that grows.
        let moving = Monomial::power(Symbol::S, natural.valuation(Symbol::S));
        let moving = natural.div_exact(&Polynomial::monomial(Integer::one(), moving));
        let narrowed;
        let knowledge = if within_tolerance {
            narrowed = self.knowledge.within_tolerance();
            &narrowed
        } else {
            self.knowledge
        };
        let moving = moving.unwrap_or_else(Polynomial::one);
        Ok(decide(&moving, knowledge, self.budget)?.verdict == Verdict::No)
    }

    fn cancels(&self, function: Symbol, claimed: &[CancellationClass]) -> Decision {
        let Some(report) = (self.report)(function) else {
            return not_known();
        };
        let Some(found) = &report.cancellations else {
            return not_known();
        };
        // An audit cut short shows that something cancels, never that nothing else does.
        if report.unaudited.is_some() && (found.is_empty() || !claimed.is_empty()) {
            return not_known();
        }
        let classes = classes(found);
        if classes == claimed {
            return (Verdict::Yes, Vec::new());
        }
        let text = if classes.is_empty() {
            "none".to_owned()
        } else {
            let words: Vec<&str> = classes.iter().map(|&class| class_word(class)).collect();
            words.join(", ")
        };
        let mut findings = vec![note("found", text)];
        for cancellation in found {
            findings.push(Finding {
                label: format!("{} factor", class_word(cancellation.class)),
                text: None,
                formula: Some((cancellation.factor.clone(), Polynomial::one())),
                as_product: false,
            });
        }
        (Verdict::No, findings)
    }
}

/// The word of the language for a class.
#[must_use]
pub(crate) fn class_word(class: CancellationClass) -> &'static str {
    match class {
        CancellationClass::Structural => "structural",
        CancellationClass::Matched => "matched",
        CancellationClass::Coincidental => "coincidental",
    }
}

fn classes(cancellations: &[Cancellation]) -> Vec<CancellationClass> {
    let mut classes: Vec<_> = cancellations.iter().map(|found| found.class).collect();
    classes.sort_unstable();
    classes.dedup();
    classes
}

/// Which end of the frequency axis.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum End {
    /// s → 0.
    Dc,
    /// s → ∞.
    Hf,
}

/// H at an end; `None` is infinite.
pub(crate) fn limit_value(
    function: &Fraction,
    end: End,
    budget: &Budget,
) -> Result<Option<Fraction>, Exceeded> {
    let upper = function.numerator();
    let lower = function.denominator();
    if upper.is_zero() {
        return Ok(Some(Fraction::zero()));
    }
    // How fast each side grows towards the end.
    let power = |polynomial: &Polynomial| match end {
        End::Dc => polynomial.valuation(Symbol::S),
        End::Hf => polynomial.degree(Symbol::S),
    };
    let (up, down) = (power(upper), power(lower));
    let vanishes = match end {
        End::Dc => up > down,
        End::Hf => up < down,
    };
    if vanishes {
        return Ok(Some(Fraction::zero()));
    }
    if up != down {
        return Ok(None);
    }
    let pick = |polynomial: &Polynomial| polynomial.coefficients(Symbol::S)[up as usize].clone();
    Fraction::new(pick(upper), pick(lower), budget)
}

fn count(claimed: &Rational, found: u32) -> Decision {
    if *claimed == Rational::from(i64::from(found)) {
        (Verdict::Yes, Vec::new())
    } else {
        let claimed = note("claimed", claimed.to_string());
        (Verdict::No, vec![claimed, note("found", found.to_string())])
    }
}

fn not_known() -> Decision {
    let text = "the formula was not completed within the budget";
    (Verdict::Undecided, vec![note("not decided", text)])
}

fn note(label: impl Into<String>, text: impl Into<String>) -> Finding {
    Finding {
        label: label.into(),
        text: Some(text.into()),
        formula: None,
        as_product: false,
    }
}
