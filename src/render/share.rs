//! Sums, and products with sums, that stand in several places, written once under a name.

use rustc_hash::FxHashMap;

use crate::render::math::{Math, Term};

/// Expressions over shared sums.
#[derive(Clone, Debug)]
pub struct Shared {
    /// The shared sums, each over the ones before it.
    pub definitions: Vec<(String, Math)>,
    /// The expressions, in the order given.
    pub values: Vec<Math>,
}

/// Finds the sums that stand in more than one place and names them `x1`, `x2`, …
///
/// Cost: linear in the number of leaves, each level hashed once.
#[must_use]
pub fn shared_sums(values: &[Math], letter: &str) -> Shared {
    let mut pool = Pool::default();
    let roots: Vec<usize> = values.iter().map(|value| pool.intern(value)).collect();
    for root in &roots {
        pool.nodes[*root].uses += 1;
    }
    pool.name_shared(letter);
    let definitions = (0..pool.nodes.len())
        .filter_map(|node| Some((pool.nodes[node].name.clone()?, pool.body(node))))
        .collect();
    let values = roots.into_iter().map(|root| pool.spelled(root)).collect();
    Shared {
        definitions,
        values,
    }
}

/// An expression whose operands are numbers of nodes.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
enum Shape {
    Leaf(Math),
    Sum(Vec<(bool, usize)>),
    Product(Vec<usize>),
    Negative(usize),
}

struct Node {
    shape: Shape,
    uses: usize,
    name: Option<String>,
}

/// Every different expression once; operands stand before what uses them.
#[derive(Default)]
struct Pool {
    nodes: Vec<Node>,
    index: FxHashMap<Shape, usize>,
}

impl Pool {
    fn intern(&mut self, math: &Math) -> usize {
        let shape = match math {
            Math::Sum(terms) => Shape::Sum(
                terms
                    .iter()
                    .map(|term| (term.negative, self.intern(&term.body)))
                    .collect(),
            ),
            Math::Product(factors) => {
                Shape::Product(factors.iter().map(|it| self.intern(it)).collect())
            }
            Math::Negative(inner) => Shape::Negative(self.intern(inner)),
            leaf => Shape::Leaf(leaf.clone()),
        };
        if let Some(node) = self.index.get(&shape) {
            return *node;
        }
        for operand in operands(&shape) {
            self.nodes[operand].uses += 1;
        }
        let node = self.nodes.len();
        self.index.insert(shape.clone(), node);
        self.nodes.push(Node {
            shape,
            uses: 0,
            name: None,
        });
        node
    }

    fn name_shared(&mut self, letter: &str) {
        let mut number = 0;
        for node in 0..self.nodes.len() {
            if self.nodes[node].uses > 1 && self.is_worth_a_name(node) {
                number += 1;
                self.nodes[node].name = Some(format!("{letter}{number}"));
            }
        }
    }

    /// Sums, and products that hold a sum without a name.
    fn is_worth_a_name(&self, node: usize) -> bool {
        let bare_sum = |node: &usize| {
            let node = &self.nodes[*node];
            node.name.is_none() && matches!(node.shape, Shape::Sum(_))
        };
        match &self.nodes[node].shape {
            Shape::Sum(_) => true,
            Shape::Product(factors) => factors.iter().any(bare_sum),
            Shape::Leaf(_) | Shape::Negative(_) => false,
        }
    }

    /// A node as it stands in others: by its name where it has one.
    fn spelled(&self, node: usize) -> Math {
        match &self.nodes[node].name {
            Some(name) => Math::name(name),
            None => self.body(node),
        }
    }

    fn body(&self, node: usize) -> Math {
        match &self.nodes[node].shape {
            Shape::Leaf(math) => math.clone(),
            Shape::Sum(terms) => Math::Sum(
                terms
                    .iter()
                    .map(|(negative, term)| Term {
                        negative: *negative,
                        body: self.spelled(*term),
                    })
                    .collect(),
            ),
            Shape::Product(factors) => {
                Math::Product(factors.iter().map(|it| self.spelled(*it)).collect())
            }
            Shape::Negative(inner) => self.spelled(*inner).signed(true),
        }
    }
}

fn operands(shape: &Shape) -> Vec<usize> {
    match shape {
        Shape::Leaf(_) => Vec::new(),
        Shape::Sum(terms) => terms.iter().map(|(_, term)| *term).collect(),
        Shape::Product(factors) => factors.clone(),
        Shape::Negative(inner) => vec![*inner],
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::render::linear::READING;

    #[test]
    fn a_sum_in_two_places_is_named_once() {
        let name = |text: &str| Math::name(text);
        let inner = Math::sum([name("R0"), name("R1")]);
        let outer = Math::sum([
            Math::product([inner.clone(), name("C1")]),
            Math::product([Math::sum([inner.clone(), name("R2")]), name("C2")]),
        ]);
        let values = [outer, Math::product([inner, name("C3")])];
        let shared = shared_sums(&values, "x");
        let definitions: Vec<String> = shared
            .definitions
            .iter()
            .map(|(name, value)| format!("{name} = {}", READING.spell(value)))
            .collect();
        let values: Vec<String> = shared.values.iter().map(|it| READING.spell(it)).collect();
        assert_eq!(definitions, ["x1 = R0 + R1"]);
        assert_eq!(values, ["x1·C1 + (R0 + R1 + R2)·C2", "x1·C3"]);
    }
}
