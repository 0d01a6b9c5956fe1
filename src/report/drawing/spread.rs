//! Labels along a line, each as near to its place as its neighbours allow.

/// Centres of labels of these sizes between `low` and `high`, near the wanted centres, none overlapping, their order
/// kept (equal wishes keep the order of the list). Where the sizes sum to more than there is, labels overlap evenly.
pub fn spread(wanted: &[f64], sizes: &[f64], low: f64, high: f64) -> Vec<f64> {
    let total: f64 = sizes.iter().sum();
    let squeeze = if total > high - low {
        (high - low) / total
    } else {
        1.0
    };
    let mut order: Vec<usize> = (0..wanted.len().min(sizes.len())).collect();
    order.sort_by(|&a, &b| wanted[a].total_cmp(&wanted[b]));
    let mut groups: Vec<Group> = Vec::new();
    for place in order {
        let size = sizes[place] * squeeze;
        let mut group = Group {
            members: vec![(place, size)],
            size,
            wish: wanted[place] - size / 2.0,
        };
        // Groups that would overlap join, and stand where the mean of their members' wishes is.
        while let Some(last) = groups.pop() {
            if last.start(low, high) + last.size <= group.start(low, high) {
                groups.push(last);
                break;
            }
            group = last.joined(group);
        }
        groups.push(group);
    }
    let mut centres = vec![0.0; wanted.len()];
    for group in groups {
        let mut start = group.start(low, high);
        for (place, size) in group.members {
            centres[place] = start + size / 2.0;
            start += size;
        }
    }
    centres
}

/// Labels that touch.
struct Group {
    /// Place in the list and size, in their order along the line.
    members: Vec<(usize, f64)>,
    size: f64,
    /// Mean start that the members wish for.
    wish: f64,
}

impl Group {
    fn start(&self, low: f64, high: f64) -> f64 {
        self.wish.min(high - self.size).max(low)
    }

    fn joined(mut self, next: Group) -> Group {
        let (a, b) = (self.members.len() as f64, next.members.len() as f64);
        let wish = (a * self.wish + b * (next.wish - self.size)) / (a + b);
        self.members.extend(next.members);
        Group {
            members: self.members,
            size: self.size + next.size,
            wish,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn labels_keep_apart_and_inside_in_their_order() {
        // A fixed sequence of pseudo-random wishes (a linear congruence), many of them crowded.
        let mut state = 7_u64;
        let mut next = || {
            state = state
                .wrapping_mul(6_364_136_223_846_793_005)
                .wrapping_add(1_442_695_040_888_963_407);
            (state >> 33) as f64 / f64::from(1_u32 << 31)
        };
        for count in 1..12 {
            let wanted: Vec<f64> = (0..count).map(|_| 300.0 * next().powi(3)).collect();
            let sizes: Vec<f64> = (0..count).map(|_| 10.0 + 15.0 * next()).collect();
            let centres = spread(&wanted, &sizes, 0.0, 300.0);
            for a in 0..count {
                assert!(
                    centres[a] >= sizes[a] / 2.0 - 1e-9
                        && centres[a] <= 300.0 - sizes[a] / 2.0 + 1e-9
                );
                for b in 0..count {
                    let apart = (centres[a] - centres[b]).abs() + 1e-9;
                    assert!(a == b || apart >= (sizes[a] + sizes[b]) / 2.0);
                    assert!(wanted[a] >= wanted[b] || centres[a] < centres[b]);
                }
            }
        }
    }

    #[test]
    fn a_lone_label_stands_where_it_wishes() {
        assert_eq!(
            spread(&[40.0, 90.0], &[20.0, 20.0], 0.0, 100.0),
            [40.0, 90.0]
        );
        assert_eq!(
            spread(&[50.0, 50.0], &[20.0, 20.0], 0.0, 100.0),
            [40.0, 60.0]
        );
        assert_eq!(spread(&[-5.0], &[20.0], 0.0, 100.0), [10.0]);
    }

    #[test]
    fn too_many_labels_stay_inside() {
        let centres = spread(&[50.0; 5], &[40.0; 5], 0.0, 100.0);
        assert_eq!(centres, [10.0, 30.0, 50.0, 70.0, 90.0]);
        assert!(spread(&[], &[], 0.0, 1.0).is_empty());
    }
}
