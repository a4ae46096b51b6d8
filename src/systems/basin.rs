//! Basins of a field: its extrema with the level at which each runs over, by flooding.

/// A local extremum with the level at which its basin runs over.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Basin {
    /// Index of the extremum.
    pub at: usize,
    /// Value there.
    pub value: f64,
    /// Level at which the flood reaches the edge, a missing value or a deeper basin.
    pub level: f64,
    /// Index of the point at which it does.
    pub saddle: usize,
    /// Points inside just before that.
    pub points: usize,
}

/// Basins of a field by flooding from below, eight neighbours, the edge being deeper than all
/// (METHODS TRK-1). For peaks pass the field with its sign changed.
///
/// The points are taken in ascending order and joined; where two basins meet, the shallower one
/// ends, and its depth is known. Ties go by index, so the result is a function of the field.
pub fn basins(values: &[f64], columns: usize, rows: usize) -> Vec<Basin> {
    let mut order: Vec<usize> = (0..values.len()).filter(|at| values[*at].is_finite()).collect();
    order.sort_by(|one, other| values[*one].total_cmp(&values[*other]).then(one.cmp(other)));
    let mut forest = Forest { parent: vec![usize::MAX; values.len()] };
    // By root: where the basin began, its points, whether it has run over.
    let mut begun = vec![usize::MAX; values.len()];
    let mut points = vec![0_usize; values.len()];
    let mut over = vec![false; values.len()];
    let mut found = Vec::new();
    for &at in &order {
        forest.parent[at] = at;
        begun[at] = at;
        points[at] = 1;
        let (column, row) = (at % columns, at / columns);
        let edge = column == 0 || row == 0 || column + 1 == columns || row + 1 == rows;
        let mut outside = edge;
        for j in row.saturating_sub(1)..=(row + 1).min(rows - 1) {
            for i in column.saturating_sub(1)..=(column + 1).min(columns - 1) {
                let other = j * columns + i;
                if other == at {
                    continue;
                }
                if !values[other].is_finite() {
                    outside = true;
                    continue;
                }
                if forest.parent[other] == usize::MAX {
                    continue;
                }
                let (one, two) = (forest.root(at), forest.root(other));
                if one == two {
                    continue;
                }
                // The one that began lower goes on; a basin that has run over is the edge itself.
                let deeper = |x: usize, y: usize| {
                    let (bx, by) = (begun[x], begun[y]);
                    over[x]
                        || (!over[y]
                            && (values[bx], bx)
                                .partial_cmp(&(values[by], by))
                                .is_none_or(std::cmp::Ordering::is_le))
                };
                let (stays, ends) = if deeper(one, two) { (one, two) } else { (two, one) };
                if !over[ends] && begun[ends] != at {
                    let begin = begun[ends];
                    found.push(Basin {
                        at: begin,
                        value: values[begin],
                        level: values[at],
                        saddle: at,
                        points: points[ends],
                    });
                }
                forest.parent[ends] = stays;
                points[stays] += points[ends];
            }
        }
        let root = forest.root(at);
        if outside && !over[root] {
            over[root] = true;
            let begin = begun[root];
            if begin != at {
                found.push(Basin {
                    at: begin,
                    value: values[begin],
                    level: values[at],
                    saddle: at,
                    points: points[root] - 1,
                });
            }
        }
    }
    found.sort_by(|one, other| one.value.total_cmp(&other.value).then(one.at.cmp(&other.at)));
    found
}

struct Forest {
    parent: Vec<usize>,
}

impl Forest {
    fn root(&mut self, mut at: usize) -> usize {
        while self.parent[at] != at {
            // Halving the path keeps the trees flat.
            self.parent[at] = self.parent[self.parent[at]];
            at = self.parent[at];
        }
        at
    }
}
