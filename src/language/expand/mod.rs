//! Repetition, modules and used files: what is left is a flat list of statements, each with its scope.

mod fill;
mod whole;

use std::collections::{BTreeMap, BTreeSet};
use std::rc::Rc;

use crate::diagnostic::Diagnostic;
use crate::language::expand::whole::{estimate, whole};
use crate::language::nearest::nearest;
use crate::language::parser::parse;
use crate::language::syntax::{
    Expression, ExpressionNode, Group, Link, Listed, Module, Name, NamePart, OptionValue,
    Statement, StatementKind, Terminal, Whole,
};
use crate::source::{SourceId, Sources, Span};

/// Parts (and other statements) after repetition.
const MAX_STATEMENTS: usize = 10_000_000;
/// Modules inside modules.
const MAX_DEPTH: usize = 64;

/// Where a statement stands: at the top or in an instance of a module.
#[derive(Debug, Default)]
pub(crate) struct Scope {
    /// `A1.` in front of every own name; empty at the top.
    pub(crate) prefix: String,
    /// Ports and the outer nodes they are, already global names.
    pub(crate) ports: BTreeMap<String, String>,
    /// Parameters.
    pub(crate) parameters: BTreeMap<String, Given>,
    /// The scope of the line that made the instance, and that line.
    pub(crate) outer: Option<(Rc<Scope>, Span)>,
    /// Name of the instance.
    pub(crate) instance: String,
}

/// What a parameter stands for inside its module.
#[derive(Clone, Debug)]
pub(crate) enum Given {
    /// An own symbol with an optional nominal.
    Own(Option<Expression>),
    /// The outer expression, in its scope.
    Outer(Expression, Rc<Scope>),
    /// A number fixed in every formula.
    Exactly(Expression, Rc<Scope>),
}

impl Scope {
    /// Global name of a node.
    pub(crate) fn node(&self, name: &str) -> String {
        if name == "gnd" || name == "ground" {
            return "ground".to_owned();
        }
        if let Some(outer) = self.ports.get(name) {
            return outer.clone();
        }
        format!("{}{name}", self.prefix)
    }

    /// Global name of a part or symbol.
    pub(crate) fn own(&self, name: &str) -> String {
        format!("{}{name}", self.prefix)
    }
}

/// A statement whose names hold no braces any more.
#[derive(Debug)]
pub(crate) struct Flat {
    pub(crate) statement: Statement,
    pub(crate) scope: Rc<Scope>,
}

/// Reads the text of a used file: from the name of the using file and the path as written to the
/// name to report and the text, or a sentence.
pub type Loader<'a> = dyn Fn(&str, &str) -> Result<(String, String), String> + 'a;

pub(crate) struct Expander<'a> {
    pub(crate) sources: &'a mut Sources,
    pub(crate) load: &'a Loader<'a>,
    pub(crate) set: &'a [(String, String)],
    pub(crate) flat: Vec<Flat>,
    pub(crate) errors: Vec<Diagnostic>,
    /// `let` names, for `--set`.
    pub(crate) lets: BTreeSet<String>,
    /// Instances by global name with their port names.
    pub(crate) instances: BTreeMap<String, Rc<Scope>>,
    modules: BTreeMap<String, Module>,
    used: BTreeSet<String>,
    count: usize,
    over: bool,
}

type Names = BTreeMap<String, i64>;

impl<'a> Expander<'a> {
    pub(crate) fn new(
        sources: &'a mut Sources,
        load: &'a Loader<'a>,
        set: &'a [(String, String)],
    ) -> Self {
        Self {
            sources,
            load,
            set,
            flat: Vec::new(),
            errors: Vec::new(),
            lets: BTreeSet::new(),
            instances: BTreeMap::new(),
            modules: BTreeMap::new(),
            used: BTreeSet::new(),
            count: 0,
            over: false,
        }
    }

    /// Expands a whole text.
    pub(crate) fn run(&mut self, main: SourceId) {
        let source = self.sources.get(main).clone();
        let (statements, errors) = parse(main, &source.text);
        self.errors.extend(errors);
        self.take_modules(&statements);
        let mut trail = vec![source.name.clone()];
        self.take_used(&statements, &mut trail);
        let top = Rc::new(Scope::default());
        let mut names = Names::new();
        self.statements(statements, &top, &mut names, &mut Vec::new());
    }

    fn take_modules(&mut self, statements: &[Statement]) {
        for statement in statements {
            let StatementKind::Module(module) = &statement.kind else {
                continue;
            };
            let name = plain(&module.name);
            if let Some(before) = self.modules.get(&name) {
                self.errors.push(
                    Diagnostic::error(module.name.place, format!("module {name} is written twice"))
                        .label(before.name.place, "first here")
                        .help("give one of them another name"),
                );
                continue;
            }
            self.modules.insert(name, module.clone());
        }
    }

    /// Modules of used files, and of the files they use.
    fn take_used(&mut self, statements: &[Statement], trail: &mut Vec<String>) {
        for statement in statements {
            let StatementKind::Use(path, place) = &statement.kind else {
                continue;
            };
            let from = trail.last().cloned().unwrap_or_default();
            let (name, text) = match (self.load)(&from, path) {
                Ok(found) => found,
                Err(sentence) => {
                    self.errors.push(
                        Diagnostic::error(*place, sentence)
                            .help("the path is relative to the file that uses it"),
                    );
                    continue;
                }
            };
            if trail.contains(&name) {
                self.errors.push(
                    Diagnostic::error(*place, format!("{name} uses itself, directly or by others"))
                        .help("put the shared modules into a file that uses none of these"),
                );
                continue;
            }
            if !self.used.insert(name.clone()) {
                continue;
            }
            let id = self.sources.add(name.clone(), text.as_str());
            let (statements, errors) = parse(id, &text);
            self.errors.extend(errors);
            self.take_modules(&statements);
            trail.push(name);
            self.take_used(&statements, trail);
            trail.pop();
        }
    }

    fn statements(
        &mut self,
        statements: Vec<Statement>,
        scope: &Rc<Scope>,
        names: &mut Names,
        inside: &mut Vec<String>,
    ) {
        for statement in statements {
            if self.over {
                return;
            }
            self.statement(statement, scope, names, inside);
        }
    }

    fn statement(
        &mut self,
        statement: Statement,
        scope: &Rc<Scope>,
        names: &mut Names,
        inside: &mut Vec<String>,
    ) {
        let place = statement.place;
        match statement.kind {
            StatementKind::Let(name, value) => {
                let text = plain(&name);
                let set = self.set.iter().find(|(set, _)| *set == text).cloned();
                if scope.prefix.is_empty() {
                    self.lets.insert(text.clone());
                }
                let value = match set {
                    Some((_, value)) if scope.prefix.is_empty() => {
                        value.trim().parse().map_err(|_| {
                            Diagnostic::error(
                                name.place,
                                format!("--set {text}={value}: {text} is a whole number"),
                            )
                            .help(format!("write --set {text}=20"))
                        })
                    }
                    _ => whole(&value, names),
                };
                match value {
                    Ok(value) => {
                        names.insert(text, value);
                    }
                    Err(error) => self.errors.push(error),
                }
            }
            StatementKind::For {
                name,
                from,
                to,
                body,
            } => {
                self.repeat(&name, &from, &to, &body, place, scope, names, inside);
            }
            StatementKind::Module(module) => {
                if !scope.prefix.is_empty() {
                    self.errors.push(
                        Diagnostic::error(
                            module.place,
                            "a module cannot be written inside another",
                        )
                        .help("move it to the top of the file"),
                    );
                }
            }
            StatementKind::Use(..) => {
                if !scope.prefix.is_empty() {
                    self.errors.push(Diagnostic::error(
                        place,
                        "use stands at the top of a file, not in a module",
                    ));
                }
            }
            StatementKind::Derive { .. } | StatementKind::Claim(..)
                if !scope.prefix.is_empty() || !inside.is_empty() =>
            {
                self.errors.push(
                    Diagnostic::error(place, "derive and claim stand at the top of the file")
                        .help("move this line out of the module or repetition"),
                );
            }
            kind => {
                self.count += 1;
                if self.count > MAX_STATEMENTS {
                    self.over = true;
                    self.errors.push(
                        Diagnostic::error(place, "more than 10 000 000 parts after repetition")
                            .help("lower the number of repetitions"),
                    );
                    return;
                }
                match fill::fill(kind, names) {
                    Ok(StatementKind::Is {
                        names: instances,
                        kind,
                        terminals,
                        options,
                        coils,
                    }) if self.modules.contains_key(&plain(&kind)) => {
                        let _ = coils;
                        self.instance(&instances, &kind, terminals, options, place, scope, inside);
                    }
                    Ok(kind) => self.flat.push(Flat {
                        statement: Statement { kind, place },
                        scope: Rc::clone(scope),
                    }),
                    Err(error) => self.errors.push(*error),
                }
            }
        }
    }

    #[expect(
        clippy::too_many_arguments,
        reason = "the parts of one statement and where it stands"
    )]
    fn repeat(
        &mut self,
        name: &Name,
        from: &Whole,
        to: &Whole,
        body: &[Statement],
        place: Span,
        scope: &Rc<Scope>,
        names: &mut Names,
        inside: &mut Vec<String>,
    ) {
        let (from, to) = match (whole(from, names), whole(to, names)) {
            (Ok(from), Ok(to)) => (from, to),
            (Err(error), _) | (_, Err(error)) => {
                self.errors.push(error);
                return;
            }
        };
        let rounds = i128::from(to) - i128::from(from) + 1;
        if rounds > MAX_STATEMENTS as i128 {
            self.over = true;
            self.errors.push(
                Diagnostic::error(
                    place,
                    format!("this repeats {rounds} times; the limit is 10 000 000 parts"),
                )
                .help("lower the last number"),
            );
            return;
        }
        let text = plain(name);
        let mut trial = names.clone();
        let each = estimate(body, &mut trial, &text, (from, to));
        if rounds > 0 && each.saturating_mul(rounds.unsigned_abs()) > MAX_STATEMENTS as u128 {
            self.over = true;
            self.errors.push(
                Diagnostic::error(place, "more than 10 000 000 parts after repetition")
                    .help("lower the number of repetitions"),
            );
            return;
        }
        let before = names.get(&text).copied();
        inside.push(String::from("for"));
        for value in from..=to {
            if self.over {
                break;
            }
            names.insert(text.clone(), value);
            self.count += 1;
            if self.count > MAX_STATEMENTS {
                self.over = true;
                self.errors.push(
                    Diagnostic::error(place, "more than 10 000 000 parts after repetition")
                        .help("lower the number of repetitions"),
                );
            }
            self.statements(body.to_vec(), scope, names, inside);
        }
        inside.pop();
        match before {
            Some(value) => names.insert(text, value),
            None => names.remove(&text),
        };
    }

    #[expect(
        clippy::too_many_arguments,
        reason = "the parts of one statement and where it stands"
    )]
    fn instance(
        &mut self,
        instances: &[Name],
        kind: &Name,
        terminals: Option<Vec<Terminal>>,
        options: Vec<OptionValue>,
        place: Span,
        scope: &Rc<Scope>,
        inside: &mut Vec<String>,
    ) {
        let module_name = plain(kind);
        let Some(module) = self.modules.get(&module_name).cloned() else {
            return;
        };
        let marker = format!("module {module_name}");
        if inside.contains(&marker) || inside.len() > MAX_DEPTH {
            self.errors.push(
                Diagnostic::error(place, format!("module {module_name} contains itself"))
                    .label(module.place, "its head")
                    .help("a module may hold other modules, not itself"),
            );
            return;
        }
        let [name] = instances else {
            self.errors.push(
                Diagnostic::error(place, "one line makes one instance of a module")
                    .help("write one line for each"),
            );
            return;
        };
        let own = scope.own(&plain(name));
        let mut made = Scope {
            prefix: format!("{own}."),
            outer: Some((Rc::clone(scope), place)),
            instance: own.clone(),
            ..Scope::default()
        };
        self.connect(
            &module,
            terminals.unwrap_or_default(),
            &mut made,
            scope,
            place,
        );
        self.parameters(&module, options, &mut made, scope);
        if let Some(before) = self.instances.get(&own) {
            let mut error = Diagnostic::error(name.place, format!("{own} is made twice"))
                .help("give one of them another name");
            if let Some((_, first)) = &before.outer {
                error = error.label(*first, "first here");
            }
            self.errors.push(error);
            return;
        }
        let made = Rc::new(made);
        self.instances.insert(own, Rc::clone(&made));
        inside.push(marker);
        self.statements(module.body, &made, &mut Names::new(), inside);
        inside.pop();
    }

    fn connect(
        &mut self,
        module: &Module,
        terminals: Vec<Terminal>,
        made: &mut Scope,
        scope: &Rc<Scope>,
        place: Span,
    ) {
        let ports: Vec<String> = module.ports.iter().map(plain).collect();
        for terminal in terminals {
            if !ports.contains(&terminal.name) {
                self.errors.push(
                    Diagnostic::error(
                        terminal.place,
                        format!(
                            "module {} has no port {}",
                            plain(&module.name),
                            terminal.name
                        ),
                    )
                    .help(format!("its ports are {}", ports.join(", "))),
                );
                continue;
            }
            let node = match &terminal.node {
                Some(node) => scope.node(&plain(node)),
                None => scope.node(&terminal.name),
            };
            if made.ports.insert(terminal.name.clone(), node).is_some() {
                self.errors.push(Diagnostic::error(
                    terminal.place,
                    format!("port {} is connected twice", terminal.name),
                ));
            }
        }
        let open: Vec<&String> = ports
            .iter()
            .filter(|port| !made.ports.contains_key(*port))
            .collect();
        if let Some(first) = open.first() {
            let list: Vec<&str> = open.iter().map(|port| port.as_str()).collect();
            self.errors.push(
                Diagnostic::error(place, format!("port {} is not connected", list.join(", ")))
                    .help(format!("add {first} and its node, such as {first} ground")),
            );
        }
    }

    fn parameters(
        &mut self,
        module: &Module,
        options: Vec<OptionValue>,
        made: &mut Scope,
        scope: &Rc<Scope>,
    ) {
        let known: Vec<String> = module
            .parameters
            .iter()
            .map(|parameter| plain(&parameter.name))
            .collect();
        for parameter in &module.parameters {
            let given = match &parameter.default {
                Some(value) if parameter.exactly => {
                    Given::Exactly(value.clone(), Rc::new(Scope::default()))
                }
                default => Given::Own(default.clone()),
            };
            made.parameters.insert(plain(&parameter.name), given);
        }
        for option in options {
            let name = plain(&option.name);
            if !known.contains(&name) {
                let mut error = Diagnostic::error(
                    option.name.place,
                    format!("module {} has no parameter {name}", plain(&module.name)),
                );
                error = match nearest(&name, known.iter().map(String::as_str)) {
                    Some(near) => error.help(format!("did you mean {near}?")),
                    None if known.is_empty() => error.help("it has no parameters"),
                    None => error.help(format!("its parameters are {}", known.join(", "))),
                };
                self.errors.push(error);
                continue;
            }
            let given = match option.value {
                None => Given::Own(None),
                Some(value) if option.exactly => Given::Exactly(value, Rc::clone(scope)),
                Some(value) if has_name(&value) => Given::Outer(value, Rc::clone(scope)),
                Some(value) => Given::Own(Some(value)),
            };
            made.parameters.insert(name, given);
        }
    }
}

/// The text of a name without braces.
pub(crate) fn plain(name: &Name) -> String {
    name.parts
        .iter()
        .map(|part| match part {
            NamePart::Text(text) => text.as_str(),
            NamePart::Brace(_) => "{}",
        })
        .collect()
}

/// Whether a name stands in an expression.
pub(crate) fn has_name(expression: &Expression) -> bool {
    match &expression.node {
        ExpressionNode::Number(_) => false,
        ExpressionNode::Name(_) | ExpressionNode::Voltage(_) | ExpressionNode::Current(_) => true,
        ExpressionNode::Negate(inner) | ExpressionNode::Power(inner, _) => has_name(inner),
        ExpressionNode::Sum(list) | ExpressionNode::Product(list) => {
            list.iter().any(|(_, inner)| has_name(inner))
        }
        ExpressionNode::Parallel(list) => list.iter().any(has_name),
    }
}

type Filled<T> = Result<T, Box<Diagnostic>>;
