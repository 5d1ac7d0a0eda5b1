//! Cliques of an undirected graph: all maximal ones, and one of largest size.
//!
//! Both searches are exact unless their effort or the limit on the number of cliques runs out, and then they say so.
//! Vertices are kept as bit sets of fixed width, chosen once for the whole graph, so that the inner loops are a few
//! word operations and allocate nothing.
//!
//! # Complexity
//!
//! With n vertices there are at most 3^(n/3) maximal cliques [Moon & Moser 1965], and with the pivot that leaves the
//! fewest branches the enumeration takes O(3^(n/3)) steps of n/64 word operations each, which is the best possible
//! [Tomita et al. 2006]. A maximum clique takes exponential time at worst; the bound by colouring makes graphs of a
//! hundred vertices a matter of milliseconds in practice.
//!
//! # References
//!
//! - C. Bron and J. Kerbosch, "Algorithm 457: finding all cliques of an undirected graph", Comm. ACM 16, 1973.
//! - E. Tomita, A. Tanaka and H. Takahashi, "The worst-case time complexity for generating all maximal cliques and
//!   computational experiments", Theoretical Computer Science 363, 2006.
//! - J. W. Moon and L. Moser, "On cliques in graphs", Israel J. of Mathematics 3, 1965.
//! - P. San Segundo, D. Rodriguez-Losada and A. Jimenez, "An exact bit-parallel algorithm for the maximum clique
//!   problem", Computers & Operations Research 38, 2011.

use std::cmp::Ordering;

use fixedbitset::FixedBitSet;

use crate::base::{Effort, Halted};

/// Vertices that a graph may have; a larger one is refused by both searches as not searched at all.
pub const MOST_VERTICES: usize = 1024;

/// An undirected graph without loops, as a matrix of bits.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Graph {
    vertices: usize,
    words: usize,
    bits: Vec<u64>,
}

impl Graph {
    /// A graph of `vertices` vertices without an edge.
    pub fn new(vertices: usize) -> Self {
        let words = vertices.div_ceil(64);
        Graph { vertices, words, bits: vec![0; vertices * words] }
    }

    /// Number of vertices.
    pub fn vertices(&self) -> usize {
        self.vertices
    }

    /// Number of 64-bit words in a [`Graph::row`].
    pub fn words(&self) -> usize {
        self.words
    }

    /// Joins two different vertices.
    pub fn join(&mut self, a: usize, b: usize) {
        debug_assert!(a != b);
        self.bits[a * self.words + b / 64] |= 1 << (b % 64);
        self.bits[b * self.words + a / 64] |= 1 << (a % 64);
    }

    /// Parts two different vertices.
    pub fn part(&mut self, a: usize, b: usize) {
        self.bits[a * self.words + b / 64] &= !(1 << (b % 64));
        self.bits[b * self.words + a / 64] &= !(1 << (a % 64));
    }

    /// The edges of this graph that `other`, with as many vertices, lacks.
    #[must_use]
    pub fn without(&self, other: &Graph) -> Graph {
        debug_assert_eq!(self.vertices, other.vertices);
        let bits = self.bits.iter().zip(&other.bits).map(|(a, b)| a & !b).collect();
        Graph { bits, ..*self }
    }

    /// Whether two vertices are joined.
    pub fn joined(&self, a: usize, b: usize) -> bool {
        self.bits[a * self.words + b / 64] >> (b % 64) & 1 == 1
    }

    /// The vertices joined to `a`: bit `b % 64` of word `b / 64`.
    pub fn row(&self, a: usize) -> &[u64] {
        &self.bits[a * self.words..(a + 1) * self.words]
    }

    /// The graph with exactly the edges that this one lacks.
    #[must_use]
    pub fn complement(&self) -> Graph {
        let mut other = self.clone();
        for a in 0..self.vertices {
            let row = &mut other.bits[a * self.words..(a + 1) * self.words];
            for (w, word) in row.iter_mut().enumerate() {
                let used = (self.vertices - w * 64).min(64);
                *word = !*word & (u64::MAX >> (64 - used));
            }
            row[a / 64] &= !(1 << (a % 64));
        }
        other
    }
}

/// Compares two sets as ascending lists: at the first difference the smaller element wins, and a list that ends there
/// comes before one that goes on.
pub fn compare_as_lists(a: &FixedBitSet, b: &FixedBitSet) -> Ordering {
    let (a, b) = (a.as_slice(), b.as_slice());
    let word = |words: &[usize], w: usize| words.get(w).copied().unwrap_or(0);
    let longest = a.len().max(b.len());
    let Some(w) = (0..longest).find(|&w| word(a, w) != word(b, w)) else { return Ordering::Equal };
    let bit = (word(a, w) ^ word(b, w)).trailing_zeros();
    let (lacker, order) =
        if word(a, w) >> bit & 1 == 1 { (b, Ordering::Less) } else { (a, Ordering::Greater) };
    // The list without the element comes first only if it has come to its end.
    let goes_on = word(lacker, w) >> bit != 0 || lacker.iter().skip(w + 1).any(|&x| x != 0);
    if goes_on { order } else { order.reverse() }
}

/// The set of the vertices in the words of a [`Graph::row`].
pub fn set_of_words(words: &[u64], vertices: usize) -> FixedBitSet {
    const PARTS: usize = (u64::BITS / usize::BITS) as usize;
    let blocks =
        words.iter().flat_map(|&w| (0..PARTS).map(move |i| (w >> (i as u32 * (usize::BITS % 64))) as usize));
    FixedBitSet::with_capacity_and_blocks(vertices, blocks)
}

/// All maximal cliques, in the order of their ascending vertex lists, and `true`; or, if there are more than `limit` or
/// the effort runs out, those found until then and `false`. The effort is charged one step for about ten branches.
pub fn maximal(graph: &Graph, limit: usize, effort: &Effort) -> (Vec<FixedBitSet>, bool) {
    match graph.words {
        0 => (Vec::new(), true),
        1 => maximal_in::<1>(graph, limit, effort),
        2 => maximal_in::<2>(graph, limit, effort),
        3..=4 => maximal_in::<4>(graph, limit, effort),
        5..=8 => maximal_in::<8>(graph, limit, effort),
        9..=16 => maximal_in::<16>(graph, limit, effort),
        _ => (Vec::new(), false),
    }
}

/// A clique of largest size, as an ascending vertex list, and `true`; or, if the effort runs out, the largest found and
/// `false`. The effort is charged one step a branch.
pub fn maximum(graph: &Graph, effort: &Effort) -> (Vec<usize>, bool) {
    match graph.words {
        0 => (Vec::new(), true),
        1 => maximum_in::<1>(graph, effort),
        2 => maximum_in::<2>(graph, effort),
        3..=4 => maximum_in::<4>(graph, effort),
        5..=8 => maximum_in::<8>(graph, effort),
        9..=16 => maximum_in::<16>(graph, effort),
        _ => (vec![0], false),
    }
}

/// A set of vertices in `W` words.
#[derive(Clone, Copy, PartialEq, Eq)]
struct Set<const W: usize>([u64; W]);

impl<const W: usize> Set<W> {
    const EMPTY: Self = Set([0; W]);

    fn first(vertices: usize) -> Self {
        let mut set = Self::EMPTY;
        for v in 0..vertices {
            set.insert(v);
        }
        set
    }

    fn from_words(words: &[u64]) -> Self {
        let mut set = Self::EMPTY;
        set.0[..words.len()].copy_from_slice(words);
        set
    }

    fn insert(&mut self, v: usize) {
        self.0[v / 64] |= 1 << (v % 64);
    }

    fn remove(&mut self, v: usize) {
        self.0[v / 64] &= !(1 << (v % 64));
    }

    fn and(&self, other: &Self) -> Self {
        let mut out = *self;
        for (a, b) in out.0.iter_mut().zip(&other.0) {
            *a &= b;
        }
        out
    }

    fn or(&self, other: &Self) -> Self {
        let mut out = *self;
        for (a, b) in out.0.iter_mut().zip(&other.0) {
            *a |= b;
        }
        out
    }

    fn without(&self, other: &Self) -> Self {
        let mut out = *self;
        for (a, b) in out.0.iter_mut().zip(&other.0) {
            *a &= !b;
        }
        out
    }

    fn common(&self, other: &Self) -> u32 {
        self.0.iter().zip(&other.0).map(|(a, b)| (a & b).count_ones()).sum()
    }

    fn is_empty(&self) -> bool {
        self.0.iter().all(|&w| w == 0)
    }

    fn lowest(&self) -> Option<usize> {
        self.0.iter().position(|&w| w != 0).map(|i| i * 64 + self.0[i].trailing_zeros() as usize)
    }

    fn ones(self) -> impl Iterator<Item = usize> {
        let mut rest = self;
        std::iter::from_fn(move || {
            let v = rest.lowest()?;
            rest.remove(v);
            Some(v)
        })
    }
}

struct Enumeration<'a, 'e, const W: usize> {
    neighbours: Vec<Set<W>>,
    found: Vec<Set<W>>,
    limit: usize,
    branches: u64,
    effort: &'a Effort<'e>,
}

fn maximal_in<const W: usize>(graph: &Graph, limit: usize, effort: &Effort) -> (Vec<FixedBitSet>, bool) {
    let n = graph.vertices;
    let neighbours = (0..n).map(|v| Set::from_words(graph.row(v))).collect();
    let mut search: Enumeration<W> =
        Enumeration { neighbours, found: Vec::new(), limit, branches: 0, effort };
    let complete = search.extend(Set::EMPTY, Set::first(n), Set::EMPTY).is_ok();
    let mut sets: Vec<FixedBitSet> =
        search.found.iter().map(|set| set_of_words(&set.0[..graph.words], n)).collect();
    sets.sort_unstable_by(compare_as_lists);
    (sets, complete)
}

impl<const W: usize> Enumeration<'_, '_, W> {
    /// Lists every maximal clique that holds `clique`, some of `open` and nothing else; a vertex of `done` fits too, but
    /// all cliques with it are listed already.
    fn extend(&mut self, clique: Set<W>, open: Set<W>, done: Set<W>) -> Result<(), Halted> {
        self.branches += 1;
        if self.branches.is_multiple_of(10) {
            self.effort.spend(1)?;
        }
        if open.is_empty() {
            if done.is_empty() {
                if self.found.len() == self.limit {
                    return Err(Halted);
                }
                self.found.push(clique);
            }
            return Ok(());
        }
        let (mut open, mut done) = (open, done);
        for v in open.without(&self.neighbours[self.pivot(&open, &done)]).ones() {
            let near = self.neighbours[v];
            let mut larger = clique;
            larger.insert(v);
            self.extend(larger, open.and(&near), done.and(&near))?;
            open.remove(v);
            done.insert(v);
        }
        Ok(())
    }

    /// The vertex joined to most of `open`: only what it is not joined to needs a branch.
    fn pivot(&self, open: &Set<W>, done: &Set<W>) -> usize {
        let (mut best, mut most) = (0, None);
        for v in open.or(done).ones() {
            let common = self.neighbours[v].common(open);
            if most.is_none_or(|m| common > m) {
                (best, most) = (v, Some(common));
            }
        }
        best
    }
}

struct Largest<'a, 'e, const W: usize> {
    /// Neighbours by rank; rank 0 has the most neighbours.
    neighbours: Vec<Set<W>>,
    best: Vec<usize>,
    clique: Vec<usize>,
    /// Vertices with their colours, one stretch for each level of the recursion.
    coloured: Vec<(u32, u32)>,
    effort: &'a Effort<'e>,
}

fn maximum_in<const W: usize>(graph: &Graph, effort: &Effort) -> (Vec<usize>, bool) {
    let n = graph.vertices;
    let order = by_falling_degree(graph);
    let neighbours = order
        .iter()
        .map(|&v| {
            let mut near = Set::EMPTY;
            (0..n).filter(|&rank| graph.joined(v, order[rank])).for_each(|rank| near.insert(rank));
            near
        })
        .collect();
    let mut search: Largest<W> =
        Largest { neighbours, best: vec![0], clique: Vec::new(), coloured: Vec::new(), effort };
    let proved = search.extend(Set::first(n)).is_ok();
    let mut best: Vec<usize> = search.best.iter().map(|&rank| order[rank]).collect();
    best.sort_unstable();
    (best, proved)
}

fn by_falling_degree(graph: &Graph) -> Vec<usize> {
    let degree = |v: usize| graph.row(v).iter().map(|w| w.count_ones()).sum::<u32>();
    let mut order: Vec<(u32, usize)> = (0..graph.vertices).map(|v| (degree(v), v)).collect();
    order.sort_unstable_by_key(|&(d, v)| (std::cmp::Reverse(d), v));
    order.into_iter().map(|(_, v)| v).collect()
}

impl<const W: usize> Largest<'_, '_, W> {
    fn extend(&mut self, open: Set<W>) -> Result<(), Halted> {
        self.effort.spend(1)?;
        let base = self.coloured.len();
        self.colour(&open);
        let mut open = open;
        for i in (base..self.coloured.len()).rev() {
            let (v, colour) = (self.coloured[i].0 as usize, self.coloured[i].1 as usize);
            // A clique takes at most one vertex of each colour.
            if self.clique.len() + colour <= self.best.len() {
                break;
            }
            self.clique.push(v);
            let rest = open.and(&self.neighbours[v]);
            if rest.is_empty() {
                if self.clique.len() > self.best.len() {
                    self.best.clone_from(&self.clique);
                }
            } else {
                self.extend(rest)?;
            }
            self.clique.pop();
            open.remove(v);
        }
        self.coloured.truncate(base);
        Ok(())
    }

    /// Appends the vertices of `open` by rising colour; vertices of one colour are not joined.
    fn colour(&mut self, open: &Set<W>) {
        let mut left = *open;
        let mut colour = 0;
        while !left.is_empty() {
            colour += 1;
            let mut class = left;
            while let Some(v) = class.lowest() {
                left.remove(v);
                class.remove(v);
                class = class.without(&self.neighbours[v]);
                self.coloured.push((v as u32, colour));
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The complement of `triangles` disjoint triangles.
    fn moon_moser(triangles: usize) -> Graph {
        let mut apart = Graph::new(3 * triangles);
        for t in 0..triangles {
            apart.join(3 * t, 3 * t + 1);
            apart.join(3 * t, 3 * t + 2);
            apart.join(3 * t + 1, 3 * t + 2);
        }
        apart.complement()
    }

    /// A fixed pseudo-random graph; about `density` of 8 edges are there.
    fn scattered(vertices: usize, seed: u64, density: u64) -> Graph {
        let mut graph = Graph::new(vertices);
        let mut state = seed.wrapping_mul(0x9e37_79b9_7f4a_7c15) | 1;
        for a in 1..vertices {
            for b in 0..a {
                state ^= state << 13;
                state ^= state >> 7;
                state ^= state << 17;
                if state >> 33 & 7 < density {
                    graph.join(a, b);
                }
            }
        }
        graph
    }

    /// All maximal cliques straight from the definition: every subset is looked at.
    fn by_definition(graph: &Graph) -> Vec<Vec<usize>> {
        let n = graph.vertices();
        let clique =
            |s: u32| (0..n).all(|a| (0..a).all(|b| s >> a & 1 == 0 || s >> b & 1 == 0 || graph.joined(a, b)));
        let mut found: Vec<Vec<usize>> = (1..1u32 << n)
            .filter(|&s| clique(s) && (0..n).all(|v| s >> v & 1 == 1 || !clique(s | 1 << v)))
            .map(|s| (0..n).filter(|v| s >> v & 1 == 1).collect())
            .collect();
        found.sort();
        found
    }

    #[test]
    fn moon_moser_graphs_have_three_to_the_n_thirds_cliques() {
        for (triangles, count) in [(1, 3), (3, 27), (6, 729)] {
            let (sets, complete) = maximal(&moon_moser(triangles), usize::MAX, &Effort::of(100_000));
            assert!(complete);
            assert_eq!(sets.len(), count);
            assert!(sets.iter().all(|s| s.count_ones(..) == triangles));
            assert_eq!(maximum(&moon_moser(triangles), &Effort::of(1000)).0.len(), triangles);
        }
    }

    #[test]
    fn limit_and_effort_end_a_long_list() {
        let graph = moon_moser(40);
        let (sets, complete) = maximal(&graph, 500, &Effort::of(1_000_000));
        assert_eq!((sets.len(), complete), (500, false));
        assert!(!maximal(&graph, usize::MAX, &Effort::of(1000)).1);
    }

    #[test]
    fn small_graphs_agree_with_the_definition() {
        for seed in 0..60 {
            let graph = scattered(1 + seed as usize % 12, seed, 2 + seed % 5);
            let expected = by_definition(&graph);
            let (sets, complete) = maximal(&graph, usize::MAX, &Effort::of(100_000));
            let lists: Vec<Vec<usize>> = sets.iter().map(|s| s.ones().collect()).collect();
            assert!(complete);
            assert_eq!(lists, expected);
            let (largest, proved) = maximum(&graph, &Effort::of(100_000));
            assert!(proved && expected.iter().any(|c| largest.iter().all(|v| c.contains(v))));
            assert_eq!(Some(largest.len()), expected.iter().map(Vec::len).max());
        }
    }

    #[test]
    fn wide_graphs_take_more_than_one_word() {
        for n in [64, 65, 130, 300, 600, 1024] {
            let graph = scattered(n, n as u64, 1);
            let (sets, complete) = maximal(&graph, usize::MAX, &Effort::of(10_000_000));
            let (largest, proved) = maximum(&graph, &Effort::of(10_000_000));
            assert!(complete && proved);
            assert_eq!(Some(largest.len()), sets.iter().map(|s| s.count_ones(..)).max());
            assert!(sets.windows(2).all(|w| compare_as_lists(&w[0], &w[1]) == Ordering::Less));
        }
    }

    #[test]
    fn sets_compare_as_their_lists() {
        let sets: Vec<FixedBitSet> = (0..64u64)
            .flat_map(|bits| [set_of_words(&[bits, 0], 128), set_of_words(&[bits >> 3, bits & 7], 128)])
            .collect();
        for a in &sets {
            for b in &sets {
                let lists = a.ones().collect::<Vec<_>>().cmp(&b.ones().collect());
                assert_eq!(compare_as_lists(a, b), lists);
            }
        }
        assert_eq!(set_of_words(&[1 << 63, 2], 128).ones().collect::<Vec<_>>(), [63, 65]);
    }

    #[test]
    fn a_graph_beyond_the_limit_is_refused() {
        let graph = Graph::new(MOST_VERTICES + 1);
        assert!(!maximal(&graph, 10, &Effort::of(1000)).1);
        assert!(!maximum(&graph, &Effort::of(1000)).1);
    }
}
