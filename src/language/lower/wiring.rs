//! Paths, nodes, parts with two ends.

use std::rc::Rc;

use petgraph::unionfind::UnionFind;

use crate::diagnostic::Diagnostic;
use crate::language::expand::{Scope, plain};
use crate::language::lower::{Lowering, RawPart, What};
use crate::language::statement::WORDS;
use crate::language::syntax::{Group, Link, Name};
use crate::network::{
    Dimension, Element, Kind, NodeId, Origin, Port, Quantity, Sign, Source, Value,
};
use crate::source::Span;

/// Kinds that `name is kind` can give.
const KINDS: [&str; 9] = [
    "resistor",
    "conductance",
    "capacitor",
    "inductor",
    "impedance",
    "admittance",
    "voltage",
    "current",
    "meter",
];

impl Lowering<'_> {
    /// The raw node of a name; made when it is new.
    pub(crate) fn raw_node(&mut self, name: &str, place: Span, scope: &Scope) -> usize {
        if name == "." {
            self.node_names.push((None, place));
            return self.node_names.len() - 1;
        }
        let global = scope.node(name);
        if global == "ground" {
            if self.node_names[0].1.start == 0 && self.node_names[0].1.end == 0 {
                self.node_names[0].1 = place;
            }
            return 0;
        }
        if let Some(&index) = self.node_index.get(&global) {
            return index;
        }
        self.node_names.push((Some(global.clone()), place));
        self.node_index.insert(global, self.node_names.len() - 1);
        self.node_names.len() - 1
    }

    pub(crate) fn path(&mut self, nodes: &[Name], links: Vec<Link>, scope: &Rc<Scope>) {
        let raw: Vec<usize> = nodes
            .iter()
            .map(|node| {
                let text = plain(node);
                self.reserved(&text, node.place);
                self.raw_node(&text, node.place, scope)
            })
            .collect();
        for (index, link) in links.into_iter().enumerate() {
            let (from, to) = (raw[index], raw[index + 1]);
            match link {
                Link::Join => self.joins.push((from, to)),
                Link::Part(group) => self.group(group, from, to, scope),
            }
        }
    }

    /// Statement words are no names.
    pub(crate) fn reserved(&mut self, name: &str, place: Span) {
        if WORDS.iter().any(|(word, _)| *word == name) {
            self.error(
                place,
                format!("{name} begins statements and cannot be a name"),
                format!("write {name}1 or {name}_"),
            );
        }
    }

    fn group(&mut self, group: Group, from: usize, to: usize, scope: &Rc<Scope>) {
        match group {
            Group::One(name, value) => {
                let text = plain(&name);
                self.reserved(&text, name.place);
                self.raw_parts.push(RawPart {
                    name: scope.own(&text),
                    from,
                    to,
                    value,
                    place: name.place,
                    scope: Rc::clone(scope),
                });
            }
            Group::Parallel(members) => {
                for member in members {
                    self.group(member, from, to, scope);
                }
            }
            Group::Series(members) => {
                let last = members.len().saturating_sub(1);
                let mut at = from;
                for (index, member) in members.into_iter().enumerate() {
                    let next = if index == last {
                        to
                    } else {
                        self.node_names.push((None, self.node_names[from].1));
                        self.node_names.len() - 1
                    };
                    self.group(member, at, next, scope);
                    at = next;
                }
            }
        }
    }

    /// Merges joined nodes and gives out ids.
    pub(crate) fn node_ids(&mut self) {
        let count = self.node_names.len();
        let mut sets = UnionFind::<usize>::new(count);
        for &(a, b) in &self.joins {
            sets.union(a, b);
        }
        let mut id_of_root: Vec<Option<NodeId>> = vec![None; count];
        id_of_root[sets.find(0)] = Some(NodeId::GROUND);
        let mut ids = Vec::with_capacity(count);
        // The name of a merged node is the first that was written.
        let mut name_of_root: Vec<Option<String>> = vec![None; count];
        for (index, (name, _)) in self.node_names.iter().enumerate() {
            let root = sets.find(index);
            if name_of_root[root].is_none() {
                name_of_root[root].clone_from(name);
            }
        }
        let mut anonymous = 0;
        for index in 0..count {
            let root = sets.find(index);
            let id = match id_of_root[root] {
                Some(id) => id,
                None => {
                    let name = name_of_root[root].clone().unwrap_or_else(|| {
                        anonymous += 1;
                        format!("(node {anonymous})")
                    });
                    let id = self.builder.node(name, self.node_names[index].1);
                    id_of_root[root] = Some(id);
                    id
                }
            };
            ids.push(id);
        }
        self.node_ids = ids;
        self.check_case();
    }

    /// A reference is written, or a device stands on it by default.
    pub(crate) fn check_reference(&mut self) {
        let place = self.node_names[0].1;
        let is_written = place.start != 0
            || place.end != 0
            || self.builder.network().devices().iter().any(|device| {
                device
                    .terminals
                    .iter()
                    .any(|(_, node)| *node == NodeId::GROUND)
            });
        if is_written || self.node_names.len() == 1 {
            return;
        }
        if let Some(&zero) = self.node_index.get("0") {
            let place = self.node_names[zero].1;
            self.error(
                place,
                "no node is the reference; 0 is an ordinary node",
                "write ground for the reference node",
            );
        } else {
            let place = self.node_names[1].1;
            self.error(
                place,
                "no node is the reference",
                "call the common node ground",
            );
        }
    }

    /// `vcc` beside `VCC`.
    fn check_case(&mut self) {
        let mut seen: std::collections::BTreeMap<String, (String, Span)> =
            std::collections::BTreeMap::new();
        let mut found = Vec::new();
        let mut nodes: Vec<(usize, &String)> = self
            .node_index
            .iter()
            .map(|(name, &index)| (index, name))
            .collect();
        nodes.sort_unstable();
        for (index, name) in nodes {
            let place = self.node_names[index].1;
            let low = name.to_lowercase();
            match seen.get(&low) {
                Some((before, first)) => found.push((name.clone(), place, before.clone(), *first)),
                None => {
                    seen.insert(low, (name.clone(), place));
                }
            }
        }
        for (name, place, before, first) in found {
            self.messages.push(
                Diagnostic::warning(
                    place,
                    format!("{name} and {before} are two nodes: case matters"),
                )
                .label(first, format!("{before} first here"))
                .help("write one of them for both if they are meant to be one"),
            );
        }
    }

    pub(crate) fn make_parts(&mut self) {
        for raw in std::mem::take(&mut self.raw_parts) {
            self.make_part(&raw);
            self.raw_parts.push(raw);
        }
        let kinds: Vec<(String, Span)> = self
            .kinds
            .iter()
            .filter(|(name, _)| !self.names.contains_key(*name))
            .map(|(name, (_, place))| (name.clone(), *place))
            .collect();
        for (name, place) in kinds {
            self.error(
                place,
                format!("{name} stands on no path"),
                format!("place it: a -{name}- b"),
            );
        }
    }

    fn kind_word(&mut self, raw: &RawPart) -> Option<&'static str> {
        if let Some((kind, place)) = self.kinds.get(&raw.name).cloned() {
            let found = KINDS.into_iter().find(|known| *known == kind);
            if found.is_none() {
                let near = crate::language::nearest::nearest(&kind, KINDS.into_iter());
                let help = near.map_or_else(
                    || {
                        format!(
                            "kinds of parts are {}; devices have terminals in parentheses",
                            KINDS.join(", ")
                        )
                    },
                    |near| format!("did you mean {near}?"),
                );
                self.error(place, format!("{kind} is no kind of part"), help);
            }
            return found;
        }
        let own = raw.name.rsplit('.').next().unwrap_or(&raw.name);
        let kind = match own.chars().next() {
            Some('R') => "resistor",
            Some('C') => "capacitor",
            Some('L') => "inductor",
            Some('Z') => "impedance",
            Some('Y') => "admittance",
            Some('V') => "voltage",
            Some('I') => "current",
            _ => {
                self.error(
                    raw.place,
                    format!("{own} is a part of unknown kind"),
                    format!("give its kind: {own} is resistor; names that begin with R C L Z Y V I have theirs"),
                );
                self.through(&raw.scope);
                return None;
            }
        };
        Some(kind)
    }

    fn make_part(&mut self, raw: &RawPart) {
        if let Some(before) = self.names.get(&raw.name) {
            let error = Diagnostic::error(raw.place, format!("{} is placed twice", raw.name))
                .label(before.place, "first placed here")
                .help("a designator stands on one path only; give this part another name");
            self.messages.push(error);
            self.through(&raw.scope);
            return;
        }
        let Some(word) = self.kind_word(raw) else {
            return;
        };
        let port = Port {
            from: self.node_ids[raw.from],
            to: self.node_ids[raw.to],
        };
        let (dimension, positive) = match word {
            "resistor" => (Some(Dimension::OHM), true),
            "impedance" => (Some(Dimension::OHM), false),
            "conductance" => (Some(Dimension::SIEMENS), true),
            "admittance" => (Some(Dimension::SIEMENS), false),
            "capacitor" => (Some(Dimension::FARAD), true),
            "inductor" => (Some(Dimension::HENRY), true),
            "voltage" => (Some(Dimension::VOLT), false),
            "current" => (Some(Dimension::AMPERE), false),
            _ => (None, false),
        };
        let kind = if let "meter" = word {
            Kind::Meter(port)
        } else {
            let symbol = self.new_symbol(&raw.name, Origin::Part, dimension, raw.place);
            if !positive && let Some(facts) = self.builder.facts_mut(symbol) {
                facts.sign = Sign::Real;
            }
            let value = Value::Symbol(symbol);
            let source = |quantity| {
                Kind::Source(Source {
                    quantity,
                    port,
                    drives: Vec::new(),
                    controls: Vec::new(),
                })
            };
            match word {
                "resistor" => Kind::Resistor(port, value),
                "impedance" => Kind::Impedance(port, value),
                "conductance" => Kind::Conductance(port, value),
                "admittance" => Kind::Admittance(port, value),
                "capacitor" => Kind::Capacitor(port, value),
                "inductor" => Kind::Inductor(port, value),
                "voltage" => source(Quantity::Voltage),
                _ => source(Quantity::Current),
            }
        };
        let id = self.builder.element(Element {
            name: raw.name.clone(),
            kind,
            device: None,
            place: raw.place,
        });
        self.enter(&raw.name, What::Part(id), raw.place);
    }
}
