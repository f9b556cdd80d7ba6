//! Factors that cancel by relations, and the smallest sets that are enough.

use super::*;
use crate::algebra::choice::choices;

impl Auditor<'_> {
    pub(super) fn matched_entries(
        &self,
        factor: &Polynomial,
        multiplicity: u32,
        entries: &mut Vec<Cancellation>,
    ) {
        let all: Vec<RelationId> = self.network().relations().map(|(id, _)| id).collect();
        let total = multiplicity_at(
            &self.solved.pairing,
            self.network(),
            factor,
            self.setting,
            &all.iter().copied().collect(),
        )
        .unwrap_or(multiplicity);
        let mut sets: Vec<Vec<RelationId>> = Vec::new();
        let mut open = all;
        while let Some(set) = self.smallest(factor, total, &open) {
            if set.is_empty() {
                break;
            }
            open.retain(|id| !set.contains(id));
            sets.push(set);
            if sets.len() == 4 {
                break;
            }
        }
        for (count, hides) in self.sides(factor, multiplicity) {
            let mut entry = self.entry(CancellationClass::Matched, factor, count);
            entry.hides = hides;
            let mut sets = sets.clone().into_iter();
            entry.because = sets.next().unwrap_or_default();
            entry.also_because = sets.collect();
            entries.push(entry);
        }
    }

    /// The smallest set of relations, earliest in the file, that is enough for the factor to cancel.
    pub(super) fn smallest(
        &self,
        factor: &Polynomial,
        total: u32,
        open: &[RelationId],
    ) -> Option<Vec<RelationId>> {
        let enough = |kept: &BTreeSet<RelationId>| {
            let quick = common_at(&self.solved.pairing, self.network(), kept);
            if quick.is_some_and(|degree| degree < total * factor.degree(Symbol::S)) {
                return false;
            }
            multiplicity_at(
                &self.solved.pairing,
                self.network(),
                factor,
                self.setting,
                kept,
            )
            .is_some_and(|found| found >= total)
        };
        if !enough(&open.iter().copied().collect()) {
            return None;
        }
        for size in 1..=3_usize {
            if binomial(open.len(), size) > 3000 {
                break;
            }
            if let Some(found) = subsets(open, size).find(|kept| enough(kept)) {
                return Some(found.into_iter().collect());
            }
        }
        // Deletion in reverse file order.
        let mut kept: BTreeSet<RelationId> = open.iter().copied().collect();
        for id in open.iter().rev() {
            let mut fewer = kept.clone();
            fewer.remove(id);
            if enough(&fewer) {
                kept = fewer;
            }
        }
        Some(kept.into_iter().collect())
    }
}

pub(super) fn binomial(count: usize, size: usize) -> usize {
    (0..size).fold(1, |product, step| {
        product * count.saturating_sub(step) / (step + 1)
    })
}

/// All subsets of a size, in file order.
fn subsets(open: &[RelationId], size: usize) -> impl Iterator<Item = BTreeSet<RelationId>> + '_ {
    choices(open.len(), size).map(|choice| choice.into_iter().map(|index| open[index]).collect())
}
