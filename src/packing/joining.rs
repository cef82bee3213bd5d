//! Joining nodes of a periodic graph, each join remembering the lattice translation it bridges.
//!
//! A node joined to itself in another cell closes a loop round the crystal; the loops of a component span a line, a plane
//! or all space: its dimension. Union-find with offsets, exact in integers on any cell.
//! R. E. Tarjan, J. ACM 22, 215 (1975), doi:10.1145/321879.321884 (union-find).

/// Nodes joined to components.
#[derive(Clone, Debug)]
pub struct Joining {
    parent: Vec<usize>,
    /// Cell of each node relative to its parent's.
    offset: Vec<[i32; 3]>,
    /// Independent translations of each root's component, at most three.
    loops: Vec<Vec<[i64; 3]>>,
}

/// What a join did.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Joined {
    /// Two components became one.
    United,
    /// The component became of this dimension, which it was not before.
    Wider(usize),
    /// Nothing new.
    Already,
}

impl Joining {
    /// `n` nodes, none joined.
    pub fn new(n: usize) -> Self {
        Self { parent: (0..n).collect(), offset: vec![[0; 3]; n], loops: vec![Vec::new(); n] }
    }

    /// The component's root and the cell of the node relative to it.
    pub fn root(&mut self, node: usize) -> (usize, [i32; 3]) {
        let (mut root, mut total) = (node, [0; 3]);
        while self.parent[root] != root {
            total = plus(total, self.offset[root]);
            root = self.parent[root];
        }
        // Every node on the way is hung on the root.
        let (mut at, mut rest) = (node, total);
        while self.parent[at] != root {
            let (next, step) = (self.parent[at], self.offset[at]);
            (self.parent[at], self.offset[at]) = (root, rest);
            rest = minus(rest, step);
            at = next;
        }
        (root, total)
    }

    /// Joins `a` with the image of `b` in the cell `shift`.
    pub fn join(&mut self, a: usize, b: usize, shift: [i32; 3]) -> Joined {
        let ((root_a, at_a), (root_b, at_b)) = (self.root(a), self.root(b));
        let apart = minus(plus(at_a, shift), at_b);
        if root_a == root_b {
            return self.close(root_a, apart.map(i64::from));
        }
        self.parent[root_b] = root_a;
        self.offset[root_b] = apart;
        let before = self.dimension_of(root_a).max(self.dimension_of(root_b));
        for loop_b in std::mem::take(&mut self.loops[root_b]) {
            self.close(root_a, loop_b);
        }
        match self.dimension_of(root_a) {
            after if after > before => Joined::Wider(after),
            _ => Joined::United,
        }
    }

    /// Independent translations under which the component of a node is connected to itself.
    pub fn loops(&mut self, node: usize) -> &[[i64; 3]] {
        let root = self.root(node).0;
        &self.loops[root]
    }

    fn dimension_of(&self, root: usize) -> usize {
        self.loops[root].len()
    }

    fn close(&mut self, root: usize, t: [i64; 3]) -> Joined {
        let loops = &mut self.loops[root];
        let independent = match loops.as_slice() {
            [] => t != [0; 3],
            [a] => cross(a, &t) != [0; 3],
            [a, b] => dot(&cross(a, b), &t) != 0,
            _ => false,
        };
        if !independent {
            return Joined::Already;
        }
        loops.push(t);
        Joined::Wider(loops.len())
    }
}

fn plus(a: [i32; 3], b: [i32; 3]) -> [i32; 3] {
    [a[0] + b[0], a[1] + b[1], a[2] + b[2]]
}

fn minus(a: [i32; 3], b: [i32; 3]) -> [i32; 3] {
    [a[0] - b[0], a[1] - b[1], a[2] - b[2]]
}

fn cross(a: &[i64; 3], b: &[i64; 3]) -> [i64; 3] {
    [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]]
}

fn dot(a: &[i64; 3], b: &[i64; 3]) -> i64 {
    a[0] * b[0] + a[1] * b[1] + a[2] * b[2]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn loops_count_dimensions() {
        let mut j = Joining::new(3);
        assert_eq!(j.join(0, 1, [1, 0, 0]), Joined::United);
        assert_eq!(j.join(1, 0, [-1, 0, 0]), Joined::Already);
        assert_eq!(j.join(1, 0, [0, 0, 0]), Joined::Wider(1));
        assert_eq!(j.join(0, 0, [-2, 0, 0]), Joined::Already);
        assert_eq!(j.join(2, 2, [3, 1, 0]), Joined::Wider(1));
        assert_eq!(j.join(2, 1, [0, 5, 7]), Joined::Wider(2));
        assert_eq!(j.loops(0).len(), 2);
        assert_eq!(j.join(0, 2, [9, 9, 9]), Joined::Wider(3));
        assert_eq!(j.loops(1).len(), 3);
    }

    /// Offsets add up along any order of joins.
    #[test]
    fn nodes_know_their_cell() {
        let mut j = Joining::new(6);
        for (a, b) in [(0, 1), (2, 3), (4, 5), (1, 2), (3, 4)] {
            j.join(a, b, [1, a as i32, -1]);
        }
        let cells: Vec<[i32; 3]> = (0..6).map(|n| j.root(n).1).collect();
        for (a, b) in [(0, 1), (2, 3), (4, 5), (1, 2), (3, 4)] {
            assert_eq!(minus(cells[b], cells[a]), [1, a as i32, -1]);
        }
    }
}
