//! A reduced network as a text of the network language.
//!
//! Devices stand as the parts they were taken apart into; names from inside modules have `_` for
//! `.`; every made part is defined by a relation over the original names, which stay as symbols.

mod device;
mod question;
mod value;

use std::collections::{BTreeMap, BTreeSet};

use crate::algebra::Fraction;
use crate::analysis::equivalent::{Circuit, Edge, PartId, Reduction, Tree};
pub(in crate::render) use value::{definition, number_math};

use crate::network::{ElementId, Network, NodeId};
use crate::render::linear::MACHINE;
use crate::render::math;
use crate::render::names::{FrequencyPlace, Names};

/// The text, and how names of the original read in it.
#[derive(Clone, Debug)]
pub struct Netlist {
    /// The text.
    pub text: String,
    /// What could not be written, as sentences; the text is no full account then.
    pub missing: Vec<String>,
    spelled: BTreeMap<String, String>,
}

impl Netlist {
    /// The name in the text of a name in the original.
    #[must_use]
    pub fn spelled(&self, name: &str) -> String {
        self.spelled
            .get(name)
            .cloned()
            .unwrap_or_else(|| name.to_owned())
    }
}

/// Writes a reduced network.
#[must_use]
pub fn netlist(network: &Network, reduction: &Reduction) -> Netlist {
    let mut taken = BTreeSet::new();
    let spelled = spellings(network, &reduction.circuit, &mut taken);
    let shared: Vec<_> = network
        .all_facts()
        .map(|facts| facts.symbol)
        .map(|symbol| (symbol, spelled[network.symbols().name(symbol)].as_str()))
        .collect();
    let mut writer = Writer {
        network,
        circuit: &reduction.circuit,
        names: Names::new(network, FrequencyPlace::Last).with_shared(shared),
        spelled: &spelled,
        nodes: BTreeMap::new(),
        elements: BTreeMap::new(),
        taken,
        wiring: Vec::new(),
        kinds: Vec::new(),
        devices: Vec::new(),
        values: value::Values::default(),
        questions: Vec::new(),
        missing: Vec::new(),
    };
    writer.name_elements();
    writer.others();
    for edge in reduction.circuit.living() {
        writer.edge(edge);
    }
    writer.couplings();
    for &index in &reduction.questions {
        writer.question(index);
    }
    writer.starts();
    writer.define();
    let (text, missing) = (writer.finish(), writer.missing);
    Netlist {
        text,
        missing,
        spelled,
    }
}

/// Names without a point, each its own.
fn spellings(
    network: &Network,
    circuit: &Circuit,
    taken: &mut BTreeSet<String>,
) -> BTreeMap<String, String> {
    let symbols = network
        .all_facts()
        .map(|facts| network.symbols().name(facts.symbol));
    let parts = network.elements().map(|(_, element)| element.name.as_str());
    let drives = network.drives().iter().map(|drive| drive.name.as_str());
    let couplings = network.couplings().iter().map(|it| it.name.as_str());
    let questions = network.questions().iter().map(|it| it.name.as_str());
    let made = circuit.parts.iter().map(|part| part.name.as_str());
    let all: BTreeSet<&str> = symbols
        .chain(parts)
        .chain(drives)
        .chain(couplings)
        .chain(questions)
        .chain(made)
        .collect();
    let (plain, dotted): (Vec<&str>, Vec<&str>) = all.into_iter().partition(|it| !it.contains('.'));
    let mut map = BTreeMap::new();
    for name in plain.into_iter().chain(dotted) {
        let spelled = free(&name.replace('.', "_"), taken);
        map.insert(name.to_owned(), spelled);
    }
    map
}

/// The name, with a number behind it where it is taken.
fn free(wanted: &str, taken: &mut BTreeSet<String>) -> String {
    let mut name = wanted.to_owned();
    let mut count = 1_u32;
    while !taken.insert(name.clone()) {
        count += 1;
        name = format!("{wanted}_{count}");
    }
    name
}

/// Nodes in file order, the reference after all others.
fn ground_last(node: NodeId) -> (bool, NodeId) {
    (node == NodeId::GROUND, node)
}

struct Writer<'a> {
    network: &'a Network,
    circuit: &'a Circuit,
    names: Names<'a>,
    spelled: &'a BTreeMap<String, String>,
    nodes: BTreeMap<NodeId, String>,
    elements: BTreeMap<ElementId, String>,
    taken: BTreeSet<String>,
    wiring: Vec<String>,
    kinds: Vec<String>,
    devices: Vec<String>,
    values: value::Values,
    questions: Vec<String>,
    missing: Vec<String>,
}

impl Writer<'_> {
    /// Parts of one device may share a name.
    fn name_elements(&mut self) {
        let mut seen = BTreeSet::new();
        for (id, element) in self.network.elements() {
            let name = self.name(&element.name);
            let name = if seen.insert(name.clone()) {
                name
            } else {
                free(&name, &mut self.taken)
            };
            self.elements.insert(id, name);
        }
    }

    fn name(&self, name: &str) -> String {
        self.spelled
            .get(name)
            .cloned()
            .unwrap_or_else(|| name.to_owned())
    }

    fn node(&mut self, id: NodeId) -> String {
        if id == NodeId::GROUND {
            return "ground".to_owned();
        }
        if let Some(name) = self.nodes.get(&id) {
            return name.clone();
        }
        let own = self.network.node(id).name.replace('.', "_");
        let plain = own.chars().all(|it| it.is_alphanumeric() || it == '_');
        let digits = own.bytes().all(|it| it.is_ascii_digit());
        let fits = digits || !own.starts_with(|it: char| it.is_numeric());
        let name = free(if plain && fits { &own } else { "n" }, &mut self.taken);
        self.nodes.insert(id, name.clone());
        name
    }

    fn edge(&mut self, edge: Edge) {
        let mut waiting = vec![edge];
        while let Some(edge) = waiting.pop() {
            match &self.circuit.trees[edge.tree] {
                Tree::Part(part) => {
                    let mut ends = [edge.from, edge.to];
                    ends.sort_by_key(|&node| ground_last(node));
                    let [from, to] = ends.map(|node| self.node(node));
                    let name = self.place(*part);
                    self.wiring.push(format!("{from} -{name}- {to}"));
                }
                Tree::Parallel(items) => {
                    waiting.extend(items.iter().rev().map(|&tree| Edge { tree, ..edge }))
                }
                Tree::Series { items, nodes } => {
                    let mut ends: Vec<NodeId> = [edge.from]
                        .into_iter()
                        .chain(nodes.iter().copied())
                        .chain([edge.to])
                        .collect();
                    let mut items = items.clone();
                    if ground_last(edge.to) < ground_last(edge.from) {
                        ends.reverse();
                        items.reverse();
                    }
                    let mut path = String::new();
                    for (&tree, pair) in items.iter().zip(ends.windows(2)) {
                        let &[from, to] = pair else { continue };
                        if let Tree::Part(part) = self.circuit.trees[tree] {
                            if path.is_empty() {
                                path = self.node(from);
                            }
                            let (name, to) = (self.place(part), self.node(to));
                            path.push_str(&format!(" -{name}- {to}"));
                        } else {
                            self.flush(&mut path);
                            waiting.push(Edge { from, to, tree });
                        }
                    }
                    self.flush(&mut path);
                }
            }
        }
    }

    fn flush(&mut self, path: &mut String) {
        if !path.is_empty() {
            self.wiring.push(std::mem::take(path));
        }
    }

    /// The name of a part that stands on a path; its kind and value are noted.
    fn place(&mut self, id: PartId) -> String {
        let part = &self.circuit.parts[id];
        let name = self.name(&part.name);
        self.kind(&name, part.class);
        self.part_value(id, &name);
        name
    }

    fn fraction(&mut self, value: &Fraction) -> String {
        for symbol in value.symbols() {
            self.values.need(symbol);
        }
        let math = math::ratio(value.numerator(), value.denominator(), &self.names);
        MACHINE.spell(&math)
    }

    fn finish(&mut self) -> String {
        let mut text = String::new();
        if let Some(title) = self.network.title() {
            text.push_str(&format!("title \"{title}\"\n\n"));
        }
        let values = std::mem::take(&mut self.values.lines);
        let sections = [
            &self.wiring,
            &self.kinds,
            &self.devices,
            &values,
            &self.questions,
        ];
        let sections: Vec<String> = sections
            .iter()
            .filter(|lines| !lines.is_empty())
            .map(|lines| lines.iter().map(|line| format!("{line}\n")).collect())
            .collect();
        text.push_str(&sections.join("\n"));
        text
    }
}
