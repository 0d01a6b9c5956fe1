//! Lists of numbers, one after the other in one piece of memory.

use std::ops::Range;

/// Lists, numbered from 0 in the order in which they were pushed.
#[derive(Clone, Debug)]
pub(super) struct Lists {
    /// List k is `items[starts[k]..starts[k + 1]]`.
    starts: Vec<u32>,
    items: Vec<u32>,
}

impl Default for Lists {
    fn default() -> Self {
        Lists {
            starts: vec![0],
            items: Vec::new(),
        }
    }
}

impl Lists {
    /// Appends a list.
    pub fn push(&mut self, items: impl Iterator<Item = u32>) {
        self.items.extend(items);
        self.starts.push(self.items.len() as u32);
    }

    /// Number of lists.
    pub fn len(&self) -> usize {
        self.starts.len() - 1
    }

    /// Where list k stands among all items.
    #[inline]
    pub fn span(&self, k: usize) -> Range<usize> {
        self.starts[k] as usize..self.starts[k + 1] as usize
    }

    /// List k.
    #[inline]
    pub fn of(&self, k: usize) -> &[u32] {
        &self.items[self.span(k)]
    }

    /// All items, list after list.
    pub fn items(&self) -> &[u32] {
        &self.items
    }

    /// The lists turned round: list j of the result holds, ascending, the k whose list holds j; `size` lists.
    pub fn transposed(&self, size: usize) -> Lists {
        let mut starts = vec![0_u32; size + 1];
        for &item in &self.items {
            starts[item as usize + 1] += 1;
        }
        for k in 0..size {
            starts[k + 1] += starts[k];
        }
        let mut free = starts.clone();
        let mut items = vec![0; self.items.len()];
        for k in 0..self.len() {
            for &item in self.of(k) {
                let place = &mut free[item as usize];
                items[*place as usize] = k as u32;
                *place += 1;
            }
        }
        Lists { starts, items }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn lists_turn_round() {
        let mut lists = Lists::default();
        for list in [&[1, 2][..], &[], &[2, 0]] {
            lists.push(list.iter().copied());
        }
        let turned = lists.transposed(3);
        let all: Vec<&[u32]> = (0..3).map(|k| turned.of(k)).collect();
        assert_eq!(all, [&[2][..], &[0], &[0, 2]]);
        assert_eq!((turned.len(), turned.items().len()), (3, 4));
    }
}
