//! Relations: values, controlled sources, followers of drives; cycles.

use std::collections::{BTreeMap, BTreeSet};
use std::rc::Rc;

use crate::algebra::gcd::gcd;
use crate::algebra::{Fraction, Polynomial, Rational, Symbol};
use crate::diagnostic::Diagnostic;
use crate::language::expand::{Given, Scope, has_name, plain};
use crate::language::lower::expression::{Allowed, Linear, VALUES};
use crate::language::lower::value::unit_of;
use crate::language::lower::{Lowering, RawRelation, What};
use crate::language::nearest::nearest;
use crate::language::syntax::{Expression, ExpressionNode};
use crate::network::{
    Control, Drive, ElementId, Follow, Kind, Origin, Probe, Quantity, Relation, RelationId, Sense,
    Tolerance, Value,
};
use crate::source::Span;

impl Lowering<'_> {
    pub(crate) fn relations(&mut self) {
        let relations = std::mem::take(&mut self.relations);
        let mut set: BTreeMap<String, Span> = BTreeMap::new();
        let mut good = Vec::new();
        for relation in relations {
            if let Some(first) = set.get(&relation.left) {
                let error = Diagnostic::error(
                    relation.left_place,
                    format!("{} is set twice", relation.left),
                )
                .label(*first, "first set here")
                .help("each name stands on the left of one relation");
                self.messages.push(error);
                continue;
            }
            set.insert(relation.left.clone(), relation.left_place);
            good.push(relation);
        }
        self.independent_sources(&set);
        for relation in &good {
            self.relation(relation);
        }
        self.check_cycles();
        self.relations = good;
    }

    /// V and I parts that no relation sets are independent and drives of their own.
    fn independent_sources(&mut self, set: &BTreeMap<String, Span>) {
        let sources: Vec<(ElementId, String, Quantity, Span)> = self
            .builder
            .network()
            .elements()
            .filter_map(|(id, element)| match &element.kind {
                Kind::Source(source) if element.device.is_none() => {
                    Some((id, element.name.clone(), source.quantity, element.place))
                }
                _ => None,
            })
            .filter(|(_, name, ..)| !set.contains_key(name))
            .collect();
        for (id, name, quantity, place) in sources {
            let drive = self.builder.drive(Drive {
                name: name.clone(),
                quantity: Some(quantity),
                place,
            });
            self.drive_ids.insert(name.clone(), drive);
            let element = self.builder.element_mut(id);
            let mut left_is_ground = false;
            if let Kind::Source(source) = &mut element.kind {
                source.drives.push(Follow {
                    factor: Rational::one(),
                    value: Value::one(),
                    drive,
                });
                left_is_ground = source.port.from == crate::network::NodeId::GROUND
                    && source.port.to != crate::network::NodeId::GROUND;
            }
            if left_is_ground && quantity == Quantity::Voltage {
                let port = self.builder.network().element(id).port();
                let node = port.map_or_else(String::new, |port| {
                    self.builder.network().node(port.to).name.clone()
                });
                self.warning(
                    place,
                    format!(
                        "the left node of {name} is the reference: the voltage of {node} is −{name}"
                    ),
                    format!("write {node} -{name}- ground"),
                );
            }
        }
    }

    /// Drives know the quantity of the sources that follow them.
    pub(crate) fn drives_of_sources(&mut self) {
        let mut quantity: BTreeMap<usize, BTreeSet<bool>> = BTreeMap::new();
        for (_, element) in self.builder.network().elements() {
            if let Kind::Source(source) = &element.kind {
                for follow in &source.drives {
                    quantity
                        .entry(follow.drive.index())
                        .or_default()
                        .insert(source.quantity == Quantity::Voltage);
                }
            }
        }
        let drives: Vec<(String, crate::network::DriveId)> = self
            .drive_ids
            .iter()
            .map(|(name, drive)| (name.clone(), *drive))
            .collect();
        for (name, drive) in drives {
            let found = quantity.get(&drive.index());
            let target = self.builder.drive_mut(drive);
            match found {
                None => {
                    let place = target.place;
                    self.warning(
                        place,
                        format!("no source follows {name}"),
                        format!("write Vp = {name}/2, or take the drive out"),
                    );
                }
                Some(kinds) if kinds.len() == 1 => {
                    target.quantity = Some(if kinds.contains(&true) {
                        Quantity::Voltage
                    } else {
                        Quantity::Current
                    });
                }
                Some(_) => {}
            }
        }
    }

    fn relation(&mut self, relation: &RawRelation) {
        match self
            .names
            .get(&relation.left)
            .map(|entry| entry.what.clone())
        {
            Some(What::Part(id))
                if matches!(self.builder.network().element(id).kind, Kind::Source(_)) =>
            {
                self.source_relation(id, relation);
            }
            Some(What::Part(id)) => {
                if self.builder.network().element(id).value().is_none() {
                    self.error(
                        relation.left_place,
                        format!("{} has no value to set", relation.left),
                        "a meter is a connection; ask its current",
                    );
                    return;
                }
                self.value_relation(relation, true);
            }
            Some(What::Symbol | What::Set) => self.value_relation(relation, false),
            Some(What::Drive(_)) => self.error(
                relation.left_place,
                format!("{} is a drive", relation.left),
                "sources follow drives: Vp = Vd/2",
            ),
            Some(What::Derived | What::Device(_) | What::Coupling) | None => self.error(
                relation.left_place,
                format!("{} cannot be set by a relation", relation.left),
                "relations set parts and symbols; derived functions are written derive H = …",
            ),
        }
    }

    fn value_relation(&mut self, relation: &RawRelation, is_part: bool) {
        let Some(symbol) = self.builder.symbols().find(&relation.left) else {
            return;
        };
        let Ok(linear) = self.linear(&relation.right, &relation.scope, VALUES) else {
            return;
        };
        let facts = self.builder.network().facts(symbol).cloned();
        if let Some(facts) = &facts {
            if facts.nominal.is_some() && facts.origin != Origin::Parameter {
                self.error(
                    relation.left_place,
                    format!("{} has a nominal and a relation", relation.left),
                    "keep one of them: a relation sets the nominal too",
                );
                return;
            }
            if let (Some(a), Some(b)) = (facts.dimension, linear.dimension)
                && a != b
            {
                if is_number(&relation.right) {
                    self.error(
                        relation.right.place,
                        format!("this unit does not fit {}", relation.left),
                        format!("{} is {}", relation.left, unit_of(a)),
                    );
                    return;
                }
                self.warning(
                    relation.right.place,
                    format!("the dimension of this value does not fit {}", relation.left),
                    "check the expression; nothing is converted",
                );
            }
        }
        let value = linear.constant;
        let is_zy = self.is_impedance(&relation.left);
        if value.contains(Symbol::S) && is_part && !is_zy {
            self.error(
                relation.right.place,
                format!("s stands in the value of {}", relation.left),
                "s may stand in Z and Y parts and in gains",
            );
            return;
        }
        if value.as_rational().is_some() && is_part && !relation.exactly && !self.is_exact(relation)
        {
            let right = self.text(relation.right.place);
            self.error(
                relation.place,
                format!("a relation of {} to a bare number", relation.left),
                format!(
                    "write {0} : {right} for a nominal value, or {0} = exactly {right} to fix it in every formula",
                    relation.left
                ),
            );
            return;
        }
        if value.as_rational().is_some_and(|number| number.is_zero()) && is_part && !is_zy {
            self.error(
                relation.right.place,
                format!("{} would be zero", relation.left),
                "join the nodes by a -- b or leave the part out",
            );
            return;
        }
        let text = format!(
            "{} = {}{}",
            relation.left,
            if relation.exactly { "exactly " } else { "" },
            self.spelled(&relation.right, &relation.scope)
        );
        let tolerance = relation
            .deviation
            .as_ref()
            .and_then(|deviation| self.relative_tolerance(deviation));
        self.add_relation(vec![(symbol, value)], text, tolerance, relation.place);
    }

    /// A parameter given as `exactly` makes the relation that uses it exact too.
    fn is_exact(&self, relation: &RawRelation) -> bool {
        let ExpressionNode::Name(name) = &relation.right.node else {
            return has_name(&relation.right);
        };
        matches!(
            relation.scope.parameters.get(&plain(name)),
            Some(Given::Exactly(..))
        ) || !relation.scope.parameters.contains_key(&plain(name))
    }

    fn is_impedance(&self, name: &str) -> bool {
        match self.names.get(name).map(|entry| &entry.what) {
            Some(What::Part(id)) => matches!(
                self.builder.network().element(*id).kind,
                Kind::Impedance(..) | Kind::Admittance(..)
            ),
            _ => false,
        }
    }

    fn source_relation(&mut self, id: ElementId, relation: &RawRelation) {
        let allowed = Allowed {
            responses: true,
            drives: true,
            functions: false,
        };
        let Ok(linear) = self.linear(&relation.right, &relation.scope, allowed) else {
            return;
        };
        let left = relation.left.clone();
        if linear.over.is_some() {
            self.error(
                relation.right.place,
                "a source cannot be divided by a drive",
                "write a sum of coefficient*voltage(…), coefficient*current(…) and coefficient*drive",
            );
            return;
        }
        if !linear.constant.is_zero() {
            let right = self.text(relation.right.place);
            let help = if linear.probes.is_empty() && linear.drives.is_empty() {
                format!("write {left} : {right} for a nominal value; the source stays independent")
            } else {
                "a controlled source is a sum of coefficient*voltage(…) and coefficient*current(…)"
                    .to_owned()
            };
            self.error(relation.place, format!("{left} is set to a value"), help);
            return;
        }
        if relation.deviation.is_some() {
            self.error(
                relation.place,
                "a controlled source has no tolerance",
                "give the tolerance to the symbol of its coefficient",
            );
            return;
        }
        self.make_controlled(id, relation, linear);
    }

    fn make_controlled(&mut self, id: ElementId, relation: &RawRelation, linear: Linear) {
        let left = relation.left.clone();
        let mut sets = Vec::new();
        let mut coefficient = |lowering: &mut Self, value: Fraction, what: &str| {
            if let Some(number) = value.as_rational() {
                return (number, Value::one());
            }
            let name = format!("{left}'{what}");
            let symbol = lowering.new_symbol(&name, Origin::Coefficient, None, relation.place);
            if let Some(facts) = lowering.builder.facts_mut(symbol) {
                facts.sign = crate::network::Sign::Real;
            }
            sets.push((symbol, value));
            (Rational::one(), Value::Symbol(symbol))
        };
        let mut controls = Vec::new();
        for (index, (value, probe)) in linear.probes.into_iter().enumerate() {
            if value.is_zero() {
                continue;
            }
            let (factor, value) = coefficient(self, value, &format!("c{index}"));
            controls.push(Control {
                factor,
                value,
                sense: match probe {
                    Probe::Voltage(port) => Sense::Voltage(port),
                    Probe::Current(part) => Sense::Current(part),
                },
                gain: true,
            });
        }
        let mut drives = Vec::new();
        for (index, (value, drive)) in linear.drives.into_iter().enumerate() {
            if value.is_zero() {
                continue;
            }
            let (factor, value) = coefficient(self, value, &format!("d{index}"));
            drives.push(Follow {
                factor,
                value,
                drive,
            });
        }
        if let Kind::Source(source) = &mut self.builder.element_mut(id).kind {
            source.controls = controls;
            source.drives = drives;
        }
        if !sets.is_empty() {
            let text = format!(
                "{} = {}",
                relation.left,
                self.spelled(&relation.right, &relation.scope)
            );
            self.add_relation(sets, text, None, relation.place);
        }
    }

    pub(crate) fn add_relation(
        &mut self,
        sets: Vec<(Symbol, Fraction)>,
        text: String,
        tolerance: Option<Tolerance>,
        place: Span,
    ) {
        if sets
            .iter()
            .any(|(symbol, _)| self.builder.network().set_by(*symbol).is_some())
        {
            self.error(
                place,
                "this value is set twice",
                "each name stands on the left of one relation",
            );
            return;
        }
        let device_states = states(&sets);
        self.builder.relation(Relation {
            sets,
            text,
            tolerance,
            device_states,
            place,
        });
    }

    fn check_cycles(&mut self) {
        let network = self.builder.network();
        let count = network.relations().len();
        // 0 new, 1 on the way, 2 done
        let mut state = vec![0_u8; count];
        let mut cycles: Vec<Vec<RelationId>> = Vec::new();
        for (root, _) in network.relations() {
            let mut stack: Vec<(RelationId, bool)> = vec![(root, false)];
            let mut way: Vec<RelationId> = Vec::new();
            while let Some((id, leave)) = stack.pop() {
                if leave {
                    state[id.index()] = 2;
                    way.pop();
                    continue;
                }
                if state[id.index()] != 0 {
                    continue;
                }
                state[id.index()] = 1;
                way.push(id);
                stack.push((id, true));
                for (_, value) in &network.relation(id).sets {
                    for symbol in value.symbols() {
                        if let Some(next) = network.set_by(symbol) {
                            match state[next.index()] {
                                0 => stack.push((next, false)),
                                1 => {
                                    let from = way.iter().position(|&on| on == next).unwrap_or(0);
                                    cycles.push(way[from..].to_vec());
                                }
                                _ => {}
                            }
                        }
                    }
                }
            }
        }
        let messages: Vec<Diagnostic> = cycles
            .iter()
            .map(|cycle| {
                let list: Vec<&str> = cycle
                    .iter()
                    .map(|&id| network.relation(id).text.as_str())
                    .collect();
                let mut error = Diagnostic::error(
                    network.relation(cycle[0]).place,
                    format!("these relations need each other: {}", list.join("; ")),
                )
                .help("turn one of them round or take it out");
                for &id in cycle.iter().skip(1).take(4) {
                    error = error.label(network.relation(id).place, "part of the circle");
                }
                error
            })
            .collect();
        self.messages.extend(messages);
    }

    /// Names set by relations that stand nowhere else.
    pub(crate) fn unknown_sets(&mut self) {
        let unused: Vec<(String, Span)> = self
            .names
            .iter()
            .filter(|(name, entry)| matches!(entry.what, What::Set) && !self.used.contains(*name))
            .map(|(name, entry)| (name.clone(), entry.place))
            .collect();
        for (name, place) in unused {
            let parts: Vec<String> = self
                .names
                .iter()
                .filter(|(_, entry)| matches!(entry.what, What::Part(_)))
                .map(|(name, _)| name.clone())
                .collect();
            let near = nearest(&name, parts.iter().map(String::as_str));
            let help = near.map_or_else(
                || "use it in another line, or take it out".to_owned(),
                |near| format!("did you mean {near}?"),
            );
            self.warning(place, format!("{name} stands nowhere else"), help);
        }
    }

    /// An expression as the language writes it, names global, parameters as the outer line gave them.
    pub(crate) fn spelled(&self, expression: &Expression, scope: &Rc<Scope>) -> String {
        if scope.prefix.is_empty() && !self.sources.slice(expression.place).contains('{') {
            let text = self.text(expression.place);
            if !text.is_empty() {
                return text;
            }
        }
        self.spell(expression, scope, 0)
    }

    fn spell(&self, expression: &Expression, scope: &Rc<Scope>, level: u8) -> String {
        let wrap = |text: String, own: u8| {
            if own < level {
                format!("({text})")
            } else {
                text
            }
        };
        match &expression.node {
            ExpressionNode::Number(literal) => self.text(literal.place),
            ExpressionNode::Name(name) => {
                let text = plain(name);
                match scope.parameters.get(&text) {
                    Some(Given::Outer(inner, outer) | Given::Exactly(inner, outer)) => {
                        self.spell(inner, outer, level)
                    }
                    _ if matches!(text.as_str(), "s" | "pi") => text,
                    _ => scope.own(&text),
                }
            }
            ExpressionNode::Voltage(names) => {
                let list: Vec<String> = names.iter().map(|name| scope.node(&plain(name))).collect();
                format!("voltage({})", list.join(", "))
            }
            ExpressionNode::Current(name) => format!("current({})", scope.own(&plain(name))),
            ExpressionNode::Negate(inner) => wrap(format!("-{}", self.spell(inner, scope, 2)), 1),
            ExpressionNode::Power(inner, exponent) => {
                format!("{}^{exponent}", self.spell(inner, scope, 4))
            }
            ExpressionNode::Parallel(list) => {
                let list: Vec<String> = list
                    .iter()
                    .map(|inner| self.spell(inner, scope, 4))
                    .collect();
                wrap(list.join(" || "), 0)
            }
            ExpressionNode::Product(list) => {
                let mut text = String::new();
                for (index, (over, inner)) in list.iter().enumerate() {
                    if index > 0 {
                        text.push(if *over { '/' } else { '*' });
                    }
                    text.push_str(&self.spell(inner, scope, if *over { 3 } else { 2 }));
                }
                wrap(text, 2)
            }
            ExpressionNode::Sum(list) => {
                let mut text = String::new();
                for (index, (minus, inner)) in list.iter().enumerate() {
                    match (index, minus) {
                        (0, true) => text.push('-'),
                        (0, false) => {}
                        (_, true) => text.push_str(" - "),
                        (_, false) => text.push_str(" + "),
                    }
                    text.push_str(&self.spell(inner, scope, if *minus { 2 } else { 1 }));
                }
                wrap(text, 1)
            }
        }
    }
}

fn is_number(expression: &Expression) -> bool {
    !has_name(expression)
}

/// States a relation holds: the larger degree in s after its denominators are cleared.
fn states(sets: &[(Symbol, Fraction)]) -> u32 {
    let budget = crate::budget::Budget::default();
    if !sets.iter().any(|(_, value)| value.contains(Symbol::S)) {
        return 0;
    }
    let mut common = Polynomial::one();
    for (_, value) in sets {
        if let Ok(shared) = gcd(&common, value.denominator(), &budget) {
            let rest = value.denominator().div_exact(&shared);
            common = &common * &rest.unwrap_or_else(Polynomial::one);
        }
    }
    let mut degree = common.degree(Symbol::S);
    for (_, value) in sets {
        let cleared = common.degree(Symbol::S) - value.denominator().degree(Symbol::S);
        degree = degree.max(value.numerator().degree(Symbol::S) + cleared);
    }
    degree
}
