//! Brings the steps into order and gives made parts their names.

use std::collections::BTreeSet;

use crate::analysis::equivalent::circuit::Circuit;
use crate::analysis::equivalent::part::{Class, Definition, PartId};
use crate::analysis::equivalent::{Rule, Step};
use crate::network::Network;

impl Circuit {
    /// The drops, then every made part that is left or that one of those is made of.
    pub(super) fn finish(&mut self, network: &Network) -> Vec<Step> {
        let mut steps = std::mem::take(&mut self.drops);
        let mut done: BTreeSet<PartId> = BTreeSet::new();
        let mut order: Vec<PartId> = Vec::new();
        let mut roots: Vec<PartId> = Vec::new();
        for edge in self.living() {
            roots.extend(self.parts_of(edge.tree));
        }
        let mut waiting: Vec<(PartId, bool)> =
            roots.into_iter().rev().map(|it| (it, false)).collect();
        while let Some((part, ready)) = waiting.pop() {
            if done.contains(&part) {
                continue;
            }
            if ready {
                done.insert(part);
                order.push(part);
                continue;
            }
            waiting.push((part, true));
            let members = self.parts[part].definition.members();
            waiting.extend(members.iter().rev().map(|&it| (it, false)));
        }
        let mut taken = taken(network);
        let mut counts = std::collections::BTreeMap::new();
        for id in order {
            let part = &self.parts[id];
            let Some(rule) = rule(part.class, &part.definition, part.exchanged) else {
                continue;
            };
            let count = counts.entry(part.class).or_insert(0_u32);
            let name = loop {
                *count += 1;
                let name = format!("{}eq{count}", part.class.letter());
                if taken.insert(name.clone()) {
                    break name;
                }
            };
            steps.push(Step {
                rule,
                parts: part.definition.members().to_vec(),
                makes: Some(id),
                by: None,
            });
            self.parts[id].name = name;
        }
        steps
    }
}

/// Every name that is in use.
fn taken(network: &Network) -> BTreeSet<String> {
    let symbols = network
        .all_facts()
        .map(|facts| network.symbols().name(facts.symbol));
    let parts = network.elements().map(|(_, element)| element.name.as_str());
    let devices = network.devices().iter().map(|device| device.name.as_str());
    let drives = network.drives().iter().map(|drive| drive.name.as_str());
    let couplings = network.couplings().iter().map(|it| it.name.as_str());
    let questions = network.questions().iter().map(|it| it.name.as_str());
    symbols
        .chain(parts)
        .chain(devices)
        .chain(drives)
        .chain(couplings)
        .chain(questions)
        .map(|name| name.replace('.', "_"))
        .collect()
}

fn rule(class: Class, definition: &Definition, exchanged: bool) -> Option<Rule> {
    let in_series = match definition {
        Definition::Given(..) => return None,
        Definition::Side(_) => return Some(Rule::StarDelta),
        Definition::Sum(_) => class.adds_in_series(),
        Definition::Parallel(_) => !class.adds_in_series(),
    };
    Some(match (in_series, exchanged) {
        (true, false) => Rule::Series,
        (true, true) => Rule::Exchange,
        (false, _) => Rule::Parallel,
    })
}
