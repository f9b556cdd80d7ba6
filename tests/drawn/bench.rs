//! A network and a report put together by hand.

use cutloop::algebra::{Fraction, Polynomial, Symbol};
use cutloop::analysis::form::{Forms, forms};
use cutloop::analysis::report::{Expanded, Formula, FunctionReport, NetworkOrder, Report};
use cutloop::network::{
    Ask, Assertion, Claim, Combination, Dimension, Drive, DriveId, Element, ElementId, Kind,
    Network, NetworkBuilder, NodeId, Origin, Port, Quantity, Question, Relation, RelationId, Sign,
    Source, SymbolFacts, Value,
};
use cutloop::render::{Answer, Detail, FormStyle};
use cutloop::source::{SourceId, Sources, Span};

/// Everything an answer borrows.
pub(crate) struct Bench {
    sources: Sources,
    source: SourceId,
    network: Network,
    report: Report,
}

impl Bench {
    pub(crate) fn answer(&self, detail: Detail) -> Answer<'_> {
        Answer {
            source: self.source,
            sources: &self.sources,
            network: &self.network,
            report: &self.report,
            figures: &[],
            warnings: &[],
            detail,
            style: FormStyle::default(),
        }
    }
}

/// Builds benches.
pub(crate) struct Maker {
    sources: Sources,
    source: SourceId,
    pub(crate) builder: NetworkBuilder,
    drive: DriveId,
}

impl Maker {
    pub(crate) fn new(title: &str, text: &str) -> Self {
        let mut sources = Sources::new();
        let source = sources.add("made-by-hand.cutloop", text);
        let mut builder = NetworkBuilder::new(Span::new(source, 0, 0));
        builder.title(title);
        let drive = builder.drive(Drive {
            name: "Vs".to_owned(),
            quantity: Some(Quantity::Voltage),
            place: Span::new(source, 0, 0),
        });
        Self {
            sources,
            source,
            builder,
            drive,
        }
    }

    pub(crate) fn place(&self, of: &str) -> Span {
        let text = &self.sources.get(self.source).text;
        let start = text.find(of).expect("the text holds it");
        Span::new(self.source, start, start + of.len())
    }

    /// A part whose kind follows from its first letter.
    pub(crate) fn part(&mut self, name: &str) -> ElementId {
        let port = Port {
            from: NodeId::GROUND,
            to: NodeId::GROUND,
        };
        let kind = match name.as_bytes()[0] {
            b'V' => Kind::Source(Source {
                quantity: Quantity::Voltage,
                port,
                drives: Vec::new(),
                controls: Vec::new(),
            }),
            first => {
                let dimension = match first {
                    b'R' => Dimension::OHM,
                    b'C' => Dimension::FARAD,
                    _ => Dimension::HENRY,
                };
                let value = Value::Symbol(self.symbol(name, Some(dimension)));
                match first {
                    b'R' => Kind::Resistor(port, value),
                    b'C' => Kind::Capacitor(port, value),
                    _ => Kind::Inductor(port, value),
                }
            }
        };
        let place = Span::new(self.source, 0, 0);
        self.builder.element(Element {
            name: name.to_owned(),
            kind,
            device: None,
            place,
        })
    }

    pub(crate) fn parts(&mut self, names: &[&str]) -> Vec<ElementId> {
        names.iter().map(|name| self.part(name)).collect()
    }

    pub(crate) fn symbol(&mut self, name: &str, dimension: Option<Dimension>) -> Symbol {
        let symbol = self.builder.symbols().intern(name);
        self.builder.facts(SymbolFacts {
            symbol,
            origin: Origin::Part,
            dimension,
            sign: Sign::Positive,
            nominal: None,
            tolerance: None,
            range: None,
            in_hertz: false,
            place: Span::new(self.source, 0, 0),
        });
        symbol
    }

    pub(crate) fn relation(&mut self, text: &str) -> RelationId {
        let place = Span::new(self.source, 0, 0);
        self.builder.relation(Relation {
            sets: Vec::new(),
            text: text.to_owned(),
            tolerance: None,
            device_states: 0,
            place,
        })
    }

    pub(crate) fn question(&mut self, name: &str, text: &str) {
        let symbol = self.builder.symbols().intern(name);
        let place = self.place(&format!("derive {name}"));
        self.builder.question(Question {
            name: name.to_owned(),
            symbol,
            ask: Ask::Transfer {
                response: Combination { terms: Vec::new() },
                drive: self.drive,
            },
            without: Vec::new(),
            text: text.to_owned(),
            place,
        });
    }

    pub(crate) fn claim(&mut self, text: &str) {
        let place = self.place(text);
        self.builder.claim(Claim {
            assertion: Assertion::Equals(Symbol::S, Fraction::one()),
            text: text.to_owned(),
            place,
        });
    }

    /// A polynomial from `3 R1^2 C1 + -1 s`: terms by plus signs, factors by blanks.
    pub(crate) fn polynomial(&mut self, text: &str) -> Polynomial {
        let mut sum = Polynomial::zero();
        for term in text.split('+') {
            let mut product = Polynomial::one();
            for factor in term.split_whitespace() {
                product = product * self.factor(factor);
            }
            sum = sum + product;
        }
        sum
    }

    fn factor(&mut self, text: &str) -> Polynomial {
        if let Ok(number) = text.parse::<i64>() {
            return Polynomial::constant(number);
        }
        let (name, exponent) = text.split_once('^').unwrap_or((text, "1"));
        let symbol = match name {
            "s" => Symbol::S,
            name => self.builder.symbols().intern(name),
        };
        Polynomial::symbol(symbol).pow(exponent.parse().expect("a number"))
    }

    pub(crate) fn expanded(&mut self, numerator: &[&str], denominator: &[&str]) -> Formula {
        let mut side = |list: &[&str]| -> Vec<Polynomial> {
            list.iter().map(|it| self.polynomial(it)).collect()
        };
        Formula::Expanded(Expanded {
            numerator: side(numerator),
            denominator: side(denominator),
        })
    }

    pub(crate) fn bench(self, mut report: Report) -> Bench {
        let network = self.builder.finish();
        for result in &mut report.results {
            if let Formula::Expanded(formula) = &result.formula {
                result.forms = forms(&network, formula);
            }
        }
        Bench {
            sources: self.sources,
            source: self.source,
            network,
            report,
        }
    }
}

/// A function of which nothing is known but its formula and its degrees.
pub(crate) fn function(name: &str, formula: Formula, order: u32, network: u32) -> FunctionReport {
    FunctionReport {
        name: name.to_owned(),
        question: 0,
        formula,
        forms: Forms::default(),
        order,
        numerator_order: 0,
        network: Some(network),
        hidden: Some(network - order),
        zero: false,
        no_effect: Vec::new(),
        drops_when: Vec::new(),
        origin_when: Vec::new(),
        cancellations: Some(Vec::new()),
        unaudited: None,
        nominals_missing: Vec::new(),
        relied_on: Vec::new(),
        checked_points: 8,
    }
}

/// A ledger without loops, cut-sets and constraints.
pub(crate) fn plain_order(reactive: Vec<ElementId>) -> NetworkOrder {
    NetworkOrder {
        network: u32::try_from(reactive.len()).expect("few parts"),
        reactive,
        device_states: 0,
        device_state_relations: Vec::new(),
        capacitor_loops: Vec::new(),
        inductor_cutsets: Vec::new(),
        constraints: 0,
        constraint_evidence: Vec::new(),
        static_modes: 0,
        static_sets: Vec::new(),
        integrators: 0,
    }
}

/// A report of an order and some functions.
pub(crate) fn report(order: NetworkOrder, results: Vec<FunctionReport>) -> Report {
    Report {
        order,
        results,
        claims: Vec::new(),
        states: None,
        warnings: Vec::new(),
    }
}
