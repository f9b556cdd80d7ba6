//! The order of the columns: file order, bettered by moving one column at a time.

use crate::drawing::plan::{Item, Plan};
use crate::network::NodeId;

/// Columns of the nodes in use, from left to right.
pub(super) fn order(plan: &Plan, nodes: usize) -> Vec<NodeId> {
    let mut used = vec![None; nodes];
    let pins = plan.items.iter().flat_map(|item| &item.pins);
    let ends = plan.branches.iter().map(|branch| branch.node);
    for node in pins.map(|pin| pin.node).chain(ends) {
        used[node.index()] = Some(node);
    }
    used[0] = None;
    let mut columns: Vec<NodeId> = used.into_iter().flatten().collect();
    let mut place = vec![0_i32; nodes];
    let mut best = cost(plan, &columns, &mut place);
    // Each round lowers a whole number that is not negative; the bound is for haste.
    for _ in 0..50 {
        let before = best;
        for from in 0..columns.len() {
            for to in 0..columns.len() {
                let mut other = columns.clone();
                let moved = other.remove(from);
                other.insert(to, moved);
                let price = cost(plan, &other, &mut place);
                if price < best {
                    (best, columns) = (price, other);
                }
            }
        }
        if best == before {
            break;
        }
    }
    columns
}

fn cost(plan: &Plan, columns: &[NodeId], place: &mut [i32]) -> i32 {
    for (index, node) in (0..).zip(columns) {
        place[node.index()] = index;
    }
    let last = i32::try_from(columns.len()).unwrap_or(i32::MAX) - 1;
    let lanes: i32 = plan.items.iter().map(|item| price(item, place)).sum();
    let inputs: i32 = plan.inputs.iter().map(|node| 4 * place[node.index()]).sum();
    let outputs = plan
        .outputs
        .iter()
        .filter(|node| !plan.inputs.contains(node));
    let outputs: i32 = outputs.map(|node| 2 * (last - place[node.index()])).sum();
    lanes + inputs + outputs
}

/// Long lanes cost, and devices whose inputs lie right of their outputs.
fn price(item: &Item, place: &[i32]) -> i32 {
    let at: Vec<(i32, bool)> = item
        .pins
        .iter()
        .filter(|pin| pin.node != NodeId::GROUND)
        .map(|pin| (place[pin.node.index()], pin.left))
        .collect();
    let low = at.iter().map(|it| it.0).min().unwrap_or(0);
    let high = at.iter().map(|it| it.0).max().unwrap_or(0);
    let span = 6 * (high - low - 1).max(0);
    if item.is_lane {
        let back = matches!(at.as_slice(), [first, second] if first.0 > second.0);
        return span + i32::from(back);
    }
    let lefts = at.iter().filter(|it| it.1);
    let back: usize = lefts
        .map(|left| at.iter().filter(|it| !it.1 && it.0 < left.0).count())
        .sum();
    span + 10 * i32::try_from(back).unwrap_or(0)
}
