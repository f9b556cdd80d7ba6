//! Flat statements to a network: wiring first, then kinds, values, relations, questions, claims.

mod device;
mod expression;
mod question;
mod relation;
mod value;
mod wiring;

use std::collections::{BTreeMap, BTreeSet};
use std::rc::Rc;

use crate::algebra::Symbol;
use crate::budget::{Budget, Limits};
use crate::diagnostic::Diagnostic;
use crate::language::expand::{Flat, Scope, plain};
use crate::language::nearest::nearest;
use crate::language::statement::squeeze;
use crate::language::syntax::{Expression, Name, PartValue, Statement, StatementKind};
use crate::network::{
    Dimension, DriveId, ElementId, Network, NetworkBuilder, NodeId, Origin, Sign, SymbolFacts,
};
use crate::source::{SourceId, Sources, Span};

/// What a global name of the common name space is.
#[derive(Clone, Debug)]
pub(crate) struct Entry {
    pub(crate) what: What,
    pub(crate) place: Span,
}

/// The things that share one name space.
#[derive(Clone, Debug)]
pub(crate) enum What {
    /// A part with two ends.
    Part(ElementId),
    /// A device.
    Device(crate::network::DeviceId),
    /// A coupling.
    Coupling,
    /// A free symbol, a name with a nominal, a parameter, an option.
    Symbol,
    /// A name that a relation sets and nothing else introduces.
    Set,
    /// A declared drive.
    Drive(DriveId),
    /// A derived function.
    Derived,
}

/// A part before its kind is known.
#[derive(Clone, Debug)]
pub(crate) struct RawPart {
    pub(crate) name: String,
    pub(crate) from: usize,
    pub(crate) to: usize,
    pub(crate) value: Option<Box<PartValue>>,
    pub(crate) place: Span,
    pub(crate) scope: Rc<Scope>,
}

/// A value that waits for its symbol.
pub(crate) struct Nominal {
    pub(crate) name: String,
    pub(crate) value: Box<PartValue>,
    pub(crate) place: Span,
    pub(crate) scope: Rc<Scope>,
}

/// A relation line that waits.
pub(crate) struct RawRelation {
    pub(crate) left: String,
    pub(crate) left_place: Span,
    pub(crate) right: Expression,
    pub(crate) exactly: bool,
    pub(crate) deviation: Option<crate::language::syntax::Deviation>,
    pub(crate) scope: Rc<Scope>,
    pub(crate) place: Span,
}

pub(crate) struct Lowering<'a> {
    pub(crate) sources: &'a Sources,
    pub(crate) builder: NetworkBuilder,
    pub(crate) budget: Budget,
    pub(crate) messages: Vec<Diagnostic>,
    pub(crate) names: BTreeMap<String, Entry>,
    /// Raw nodes by name, joined later.
    pub(crate) node_index: BTreeMap<String, usize>,
    pub(crate) node_names: Vec<(Option<String>, Span)>,
    pub(crate) joins: Vec<(usize, usize)>,
    pub(crate) node_ids: Vec<NodeId>,
    pub(crate) raw_parts: Vec<RawPart>,
    pub(crate) kinds: BTreeMap<String, (String, Span)>,
    pub(crate) relations: Vec<RawRelation>,
    pub(crate) instances: &'a BTreeMap<String, Rc<Scope>>,
    /// Parameters with a symbol of their own that were used.
    pub(crate) used: BTreeSet<String>,
    pub(crate) set: &'a [(String, String)],
    pub(crate) set_done: BTreeSet<String>,
    /// Drives by name: declared ones and independent sources.
    pub(crate) drive_ids: BTreeMap<String, DriveId>,
}

/// Terms one expression of a file may have when it is multiplied out.
const MAX_TERMS: usize = 20_000;

/// Lowers a flat list of statements.
pub(crate) fn lower(
    sources: &Sources,
    main: SourceId,
    flat: Vec<Flat>,
    instances: &BTreeMap<String, Rc<Scope>>,
    lets: &BTreeSet<String>,
    set: &[(String, String)],
) -> (Option<Network>, Vec<Diagnostic>) {
    let start = Span::new(main, 0, 0);
    let mut lowering = Lowering {
        sources,
        builder: NetworkBuilder::new(start),
        budget: Budget::new(Limits {
            terms: MAX_TERMS,
            ..Limits::default()
        }),
        messages: Vec::new(),
        names: BTreeMap::new(),
        node_index: BTreeMap::new(),
        node_names: vec![(Some("ground".to_owned()), start)],
        joins: Vec::new(),
        node_ids: Vec::new(),
        raw_parts: Vec::new(),
        kinds: BTreeMap::new(),
        relations: Vec::new(),
        instances,
        used: BTreeSet::new(),
        set,
        set_done: lets.clone(),
        drive_ids: BTreeMap::new(),
    };
    lowering.run(flat);
    let has_error = lowering.messages.iter().any(Diagnostic::is_error);
    if has_error {
        return (None, lowering.messages);
    }
    let network = lowering.builder.finish();
    let mut messages = lowering.messages;
    messages.extend(crate::network::check::check(&network));
    let has_error = messages.iter().any(Diagnostic::is_error);
    ((!has_error).then_some(network), messages)
}

impl Lowering<'_> {
    fn run(&mut self, flat: Vec<Flat>) {
        let mut later = Vec::new();
        for Flat { statement, scope } in flat {
            self.first_pass(statement, scope, &mut later);
        }
        self.node_ids();
        self.make_parts();
        let mut devices = Vec::new();
        let mut couplings = Vec::new();
        let mut rest = Vec::new();
        for (statement, scope) in later {
            match &statement.kind {
                StatementKind::Is { kind, .. } if plain(kind) == "coupling" => {
                    couplings.push((statement, scope));
                }
                StatementKind::Is { .. } => devices.extend(self.declare_device(statement, &scope)),
                _ => rest.push((statement, scope)),
            }
        }
        self.check_reference();
        self.introduce(&rest);
        self.set_nominals(&rest);
        for device in &devices {
            let _ = self.build_device(device);
        }
        for (statement, scope) in couplings {
            self.coupling(&statement, &scope);
        }
        self.relations();
        self.drives_of_sources();
        let (questions, others): (Vec<_>, Vec<_>) = rest
            .into_iter()
            .partition(|(statement, _)| matches!(statement.kind, StatementKind::Derive { .. }));
        for (statement, scope) in questions.into_iter().chain(others) {
            self.last_pass(statement, &scope);
        }
        self.warn_unused();
        self.unknown_sets();
    }

    fn first_pass(
        &mut self,
        statement: Statement,
        scope: Rc<Scope>,
        later: &mut Vec<(Statement, Rc<Scope>)>,
    ) {
        match statement.kind {
            StatementKind::Title(title) => self.builder.title(title),
            StatementKind::Path(nodes, links) => self.path(&nodes, links, &scope),
            StatementKind::Is {
                ref names,
                ref kind,
                terminals: None,
                ref coils,
                ..
            } if coils.is_empty() && plain(kind) != "coupling" => {
                for name in names {
                    let own = scope.own(&plain(name));
                    self.kinds.insert(own, (plain(kind), kind.place));
                }
            }
            StatementKind::Relation {
                left,
                right,
                exactly,
                deviation,
            } => {
                for name in left {
                    self.relations.push(RawRelation {
                        left: scope.own(&plain(&name)),
                        left_place: name.place,
                        right: right.clone(),
                        exactly,
                        deviation: deviation.clone(),
                        scope: Rc::clone(&scope),
                        place: statement.place,
                    });
                }
            }
            kind => {
                if let StatementKind::Is {
                    terminals: Some(list),
                    ..
                } = &kind
                {
                    for terminal in list {
                        let name = terminal.node.as_ref().map_or(terminal.name.clone(), plain);
                        if name != "."
                            && name
                                .chars()
                                .next()
                                .is_some_and(|c| c.is_alphanumeric() || c == '_')
                        {
                            self.raw_node(&name, terminal.place, &scope);
                        }
                    }
                }
                later.push((
                    Statement {
                        kind,
                        place: statement.place,
                    },
                    scope,
                ));
            }
        }
    }

    fn last_pass(&mut self, statement: Statement, scope: &Rc<Scope>) {
        match statement.kind {
            StatementKind::Assume(first, chain) => {
                self.assume(&first, chain, scope, statement.place)
            }
            StatementKind::Derive {
                name,
                question,
                without,
                text,
            } => self.derive(&name, &question, &without, text, statement.place),
            StatementKind::Claim(claimed, text) => self.claim(claimed, text, statement.place),
            StatementKind::Starts {
                part,
                is_voltage,
                value,
            } => self.start(&part, is_voltage, &value, scope, statement.place),
            _ => {}
        }
    }

    // ---- messages -------------------------------------------------------------------------------

    pub(crate) fn error(
        &mut self,
        place: Span,
        message: impl Into<String>,
        help: impl Into<String>,
    ) {
        self.messages
            .push(Diagnostic::error(place, message).help(help));
    }

    pub(crate) fn warning(
        &mut self,
        place: Span,
        message: impl Into<String>,
        help: impl Into<String>,
    ) {
        self.messages
            .push(Diagnostic::warning(place, message).help(help));
    }

    /// Adds the line that made the instance a message is about.
    pub(crate) fn through(&mut self, scope: &Scope) {
        let Some((_, place)) = &scope.outer else {
            return;
        };
        let (place, instance) = (*place, scope.instance.clone());
        if let Some(message) = self.messages.pop() {
            self.messages
                .push(message.label(place, format!("in the instance {instance}")));
        }
    }

    // ---- names ----------------------------------------------------------------------------------

    /// Enters a name; an error when it is taken.
    pub(crate) fn enter(&mut self, name: &str, what: What, place: Span) -> bool {
        if let Some(before) = self.names.get(name) {
            let message = format!("{name} is introduced twice");
            let error = Diagnostic::error(place, message)
                .label(before.place, "first here")
                .help("give one of them another name");
            self.messages.push(error);
            return false;
        }
        self.names.insert(name.to_owned(), Entry { what, place });
        true
    }

    /// A new symbol with its facts, positive, without dimension.
    pub(crate) fn new_symbol(
        &mut self,
        name: &str,
        origin: Origin,
        dimension: Option<Dimension>,
        place: Span,
    ) -> Symbol {
        let symbol = self.builder.symbols().intern(name);
        self.builder.facts(SymbolFacts {
            symbol,
            origin,
            dimension,
            sign: Sign::Positive,
            nominal: None,
            tolerance: None,
            range: None,
            in_hertz: false,
            place,
        });
        symbol
    }

    /// An unknown name, with the nearest known one.
    pub(crate) fn unknown(&mut self, name: &str, place: Span, scope: &Scope) {
        let mut known: Vec<&str> = self.names.keys().map(String::as_str).collect();
        let parameters: Vec<String> = scope.parameters.keys().cloned().collect();
        known.extend(parameters.iter().map(String::as_str));
        let bare = name.strip_prefix(&scope.prefix).unwrap_or(name);
        let near = nearest(bare, known.iter().copied())
            .or_else(|| nearest(name, known.iter().copied()))
            .map(str::to_owned);
        let node_exists = self.node_index.contains_key(&scope.node(bare));
        let help = match near {
            Some(near) => format!("did you mean {near}? else introduce it by free {bare}"),
            None if node_exists => format!("{bare} is a node; write voltage({bare})"),
            None => format!("introduce it by free {bare}, or give it a nominal: {bare} : 10 k"),
        };
        self.error(place, format!("{bare} is not known here"), help);
        self.through(scope);
    }

    /// The node of a name as written in a question or a control.
    pub(crate) fn find_node(&self, name: &str, scope: &Scope) -> Option<NodeId> {
        let global = scope.node(name);
        if global == "ground" {
            return Some(NodeId::GROUND);
        }
        if let Some(&raw) = self.node_index.get(&global) {
            return self.node_ids.get(raw).copied();
        }
        // `A1.in`: a port is the outer node.
        let (instance, port) = global.rsplit_once('.')?;
        let outer = self.instances.get(instance)?.ports.get(port)?.clone();
        if outer == "ground" {
            return Some(NodeId::GROUND);
        }
        self.node_ids.get(*self.node_index.get(&outer)?).copied()
    }

    pub(crate) fn unknown_node(&mut self, name: &Name, scope: &Scope) {
        let text = plain(name);
        let known: Vec<String> = self.node_index.keys().cloned().collect();
        let near = nearest(&text, known.iter().map(String::as_str)).map(str::to_owned);
        let help = near.map_or_else(
            || "nodes stand in paths and in the parentheses of devices".to_owned(),
            |near| format!("did you mean {near}?"),
        );
        self.error(name.place, format!("there is no node {text}"), help);
        self.through(scope);
    }

    /// Text of a place, blanks squeezed.
    pub(crate) fn text(&self, place: Span) -> String {
        squeeze(self.sources.slice(place))
    }
}
