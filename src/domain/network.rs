//! A network of resistors and the resistance between any two of its nodes.
//!
//! Nodal analysis with dense Gaussian elimination (Kirchhoff 1845, Ohm 1827): a circuit of ours has
//! a few dozen nodes, so nothing cleverer is called for. The closed forms of `ring` and `radial`
//! are checked against it. Nodes that are not connected read open (`None`).

/// A node of a network.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct Node(usize);

/// Resistors between nodes.
#[derive(Debug, Clone, Default)]
pub struct Network {
    nodes: usize,
    resistors: Vec<(usize, usize, f64)>,
}

/// A joint that is perfect is this many ohms, so that conductances stay finite. It is far below
/// any step of an instrument.
const PERFECT: f64 = 1e-7;

impl Network {
    /// An empty network.
    #[must_use]
    pub fn new() -> Self {
        Self::default()
    }

    /// A new node.
    pub fn node(&mut self) -> Node {
        self.nodes += 1;
        Node(self.nodes - 1)
    }

    /// Several new nodes.
    pub fn nodes(&mut self, count: usize) -> Vec<Node> {
        (0..count).map(|_| self.node()).collect()
    }

    /// A resistor. An infinite one is an open and adds nothing; below a tenth of a microohm it
    /// counts as a perfect joint.
    pub fn join(&mut self, a: Node, b: Node, ohm: f64) {
        if ohm.is_finite() && a != b {
            self.resistors.push((a.0, b.0, ohm.max(PERFECT)));
        }
    }

    /// The resistance between two nodes in ohm; `None` when nothing connects them.
    #[must_use]
    pub fn between(&self, a: Node, b: Node) -> Option<f64> {
        if a == b {
            return Some(0.0);
        }
        // Only the part that hangs together with `a` takes part; the rest would be singular.
        let island = self.island(a);
        if !island[b.0] {
            return None;
        }
        let mut index = vec![usize::MAX; self.nodes];
        let mut count = 0;
        for (node, here) in island.iter().enumerate() {
            // `b` is the reference and gets no equation.
            if *here && node != b.0 {
                index[node] = count;
                count += 1;
            }
        }
        // Conductance matrix with one ampere into `a` as its right-hand side.
        let width = count + 1;
        let mut rows = vec![0.0; count * width];
        for &(p, q, ohm) in &self.resistors {
            if !island[p] {
                continue;
            }
            let g = 1.0 / ohm;
            for (one, other) in [(index[p], index[q]), (index[q], index[p])] {
                if one != usize::MAX {
                    rows[one * width + one] += g;
                    if other != usize::MAX {
                        rows[one * width + other] -= g;
                    }
                }
            }
        }
        rows[index[a.0] * width + count] = 1.0;
        solve(&mut rows, count).map(|volts| volts[index[a.0]])
    }

    fn island(&self, from: Node) -> Vec<bool> {
        let mut seen = vec![false; self.nodes];
        let mut open = vec![from.0];
        seen[from.0] = true;
        while let Some(node) = open.pop() {
            for &(p, q, _) in &self.resistors {
                let next = if p == node {
                    q
                } else if q == node {
                    p
                } else {
                    continue;
                };
                if !seen[next] {
                    seen[next] = true;
                    open.push(next);
                }
            }
        }
        seen
    }
}

/// Solves rows of `count` coefficients and one right-hand side; `None` when singular.
fn solve(rows: &mut [f64], count: usize) -> Option<Vec<f64>> {
    let width = count + 1;
    for pivot in 0..count {
        let best = (pivot..count).max_by(|&i, &j| {
            rows[i * width + pivot]
                .abs()
                .total_cmp(&rows[j * width + pivot].abs())
        })?;
        if rows[best * width + pivot].abs() < 1e-12 {
            return None;
        }
        if best != pivot {
            for column in 0..width {
                rows.swap(best * width + column, pivot * width + column);
            }
        }
        for row in pivot + 1..count {
            let factor = rows[row * width + pivot] / rows[pivot * width + pivot];
            if factor != 0.0 {
                for column in pivot..width {
                    rows[row * width + column] -= factor * rows[pivot * width + column];
                }
            }
        }
    }
    let mut answer = vec![0.0; count];
    for row in (0..count).rev() {
        let known: f64 = (row + 1..count)
            .map(|column| rows[row * width + column] * answer[column])
            .sum();
        answer[row] = (rows[row * width + count] - known) / rows[row * width + row];
    }
    Some(answer)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn series_parallel_and_open_come_out_as_in_every_textbook() {
        let mut net = Network::new();
        let n = net.nodes(4);
        net.join(n[0], n[1], 2.0);
        net.join(n[1], n[2], 3.0);
        assert!((net.between(n[0], n[2]).unwrap_or(0.0) - 5.0).abs() < 1e-9);
        net.join(n[0], n[2], 5.0);
        assert!((net.between(n[0], n[2]).unwrap_or(0.0) - 2.5).abs() < 1e-9);
        assert_eq!(net.between(n[0], n[3]), None);
    }

    #[test]
    fn a_cube_of_one_ohm_edges_reads_five_sixths_across() {
        // The textbook puzzle (H. Dudeney, W. Brooks): 5/6 ohm between opposite corners.
        let mut net = Network::new();
        let n = net.nodes(8);
        for corner in 0..8_usize {
            for bit in [1, 2, 4] {
                if corner & bit == 0 {
                    net.join(n[corner], n[corner | bit], 1.0);
                }
            }
        }
        let across = net.between(n[0], n[7]).unwrap_or(0.0);
        assert!((across - 5.0 / 6.0).abs() < 1e-9, "{across}");
    }
}
