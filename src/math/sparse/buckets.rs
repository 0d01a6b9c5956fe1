//! Lines (rows or columns) sorted by how many entries they hold, for a count that changes all the time.
//!
//! One doubly linked list per count: a line moves from list to list in constant time.

const NONE: u32 = u32::MAX;

/// Lines by count.
#[derive(Clone, Debug)]
pub(super) struct Buckets {
    /// First and last line of each count.
    first: Vec<u32>,
    last: Vec<u32>,
    next: Vec<u32>,
    previous: Vec<u32>,
    /// No list below this count holds a line.
    least: usize,
}

impl Buckets {
    /// All lines with their counts; of equal ones the first line comes first. No count may ever exceed `counts.len()`.
    pub fn new(counts: impl ExactSizeIterator<Item = usize>) -> Self {
        let size = counts.len();
        let mut buckets = Buckets {
            first: vec![NONE; size + 1],
            last: vec![NONE; size + 1],
            next: vec![NONE; size],
            previous: vec![NONE; size],
            least: size,
        };
        for (line, count) in counts.enumerate() {
            buckets.insert(line as u32, count);
        }
        buckets
    }

    /// Puts a line at the end of its count's list.
    pub fn insert(&mut self, line: u32, count: usize) {
        let tail = std::mem::replace(&mut self.last[count], line);
        self.previous[line as usize] = tail;
        self.next[line as usize] = NONE;
        match self.next.get_mut(tail as usize) {
            Some(next) => *next = line,
            None => self.first[count] = line,
        }
        self.least = self.least.min(count);
    }

    /// Takes a line out of the list of this count, in which it must be.
    pub fn remove(&mut self, line: u32, count: usize) {
        let (before, after) = (self.previous[line as usize], self.next[line as usize]);
        match self.next.get_mut(before as usize) {
            Some(next) => *next = after,
            None => self.first[count] = after,
        }
        match self.previous.get_mut(after as usize) {
            Some(previous) => *previous = before,
            None => self.last[count] = before,
        }
    }

    /// The least count that some line has.
    pub fn least(&mut self) -> usize {
        while self.least + 1 < self.first.len() && self.first[self.least] == NONE {
            self.least += 1;
        }
        self.least
    }

    /// The lines of one count.
    pub fn of(&self, count: usize) -> impl Iterator<Item = u32> + '_ {
        let head = self.first.get(count).copied().unwrap_or(NONE);
        std::iter::successors(Some(head).filter(|&line| line != NONE), |&line| {
            Some(self.next[line as usize]).filter(|&line| line != NONE)
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn lines_move_between_counts() {
        let mut buckets = Buckets::new([2, 1, 2, 3].into_iter());
        assert_eq!(buckets.least(), 1);
        assert_eq!(buckets.of(2).collect::<Vec<_>>(), [0, 2]);
        buckets.remove(1, 1);
        buckets.remove(0, 2);
        buckets.insert(0, 3);
        assert_eq!(buckets.least(), 2);
        assert_eq!(buckets.of(3).collect::<Vec<_>>(), [3, 0]);
        buckets.remove(3, 3);
        buckets.insert(3, 0);
        assert_eq!((buckets.least(), buckets.of(3).count()), (0, 1));
    }
}
