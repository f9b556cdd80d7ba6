//! Choices out of a list, by their indices.

/// All ascending choices of `size` out of `count`.
pub(crate) fn choices(count: usize, size: usize) -> impl Iterator<Item = Vec<usize>> {
    let mut next: Option<Vec<usize>> = (size <= count).then(|| (0..size).collect());
    std::iter::from_fn(move || {
        let current = next.clone()?;
        let mut following = current.clone();
        let mut at = size;
        next = loop {
            if at == 0 {
                break None;
            }
            at -= 1;
            if following[at] < count - size + at {
                following[at] += 1;
                for later in at + 1..size {
                    following[later] = following[later - 1] + 1;
                }
                break Some(following);
            }
        };
        Some(current)
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn all_pairs_of_four_stand_in_order() {
        let pairs: Vec<Vec<usize>> = choices(4, 2).collect();
        assert_eq!(pairs, [[0, 1], [0, 2], [0, 3], [1, 2], [1, 3], [2, 3]]);
        assert_eq!(choices(2, 3).count(), 0);
        assert_eq!(choices(3, 0).count(), 1);
    }
}
