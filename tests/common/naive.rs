//! Definitions carried out by brute force, for tables and functions that are small enough.

use stillgate::base::Row;
use stillgate::logic::values::{Cube, Equations, Function, Phase, Target, mask};
use stillgate::project::Shape;
use stillgate::spec::FlowTable;

/// For every two rows whether they are incompatible: outputs that differ in a column, or next rows that are incompatible,
/// repeated until nothing changes [Paull & Unger 1959].
pub fn incompatible(table: &FlowTable) -> Vec<Vec<bool>> {
    let n = table.len();
    let mut apart = vec![vec![false; n]; n];
    loop {
        let before = apart.clone();
        for a in table.rows() {
            for b in table.rows().filter(|&b| b != a) {
                apart[a.at()][b.at()] |= table.columns().any(|c| {
                    let differ = table.cell(a, c).outputs.conflicts(table.cell(b, c).outputs) != 0;
                    let implied = match (table.next(a, c), table.next(b, c)) {
                        (Some(i), Some(j)) => before[i.at()][j.at()],
                        _ => false,
                    };
                    differ || implied
                });
            }
        }
        if apart == before {
            return apart;
        }
    }
}

/// Rows that are pairwise incompatible, taken greedily.
pub fn clique(apart: &[Vec<bool>]) -> Vec<usize> {
    let mut order: Vec<usize> = (0..apart.len()).collect();
    order.sort_by_key(|&r| std::cmp::Reverse(apart[r].iter().filter(|&&x| x).count()));
    let mut chosen: Vec<usize> = Vec::new();
    for r in order {
        if chosen.iter().all(|&c| apart[c][r]) {
            chosen.push(r);
        }
    }
    chosen
}

/// What a hazard-free cover must do, read off a function's values and transitions [Nowick & Dill 1995].
pub struct Covering {
    variables: usize,
    /// For each point: must be 1, must be 0, or free.
    values: Vec<Option<bool>>,
    /// Cubes that one product must hold.
    pub required: Vec<Cube>,
    /// Cubes that a product may meet only if it holds the point.
    pub privileged: Vec<(Cube, u32)>,
}

impl Covering {
    /// The question of a function of some equations; of its complement for product-of-sums.
    pub fn of(function: &Function, equations: &Equations) -> Covering {
        let variables = equations.variables.len();
        let dual = equations.shape == Shape::ProductOfSums;
        let values: Vec<Option<bool>> = (0..1u32 << variables)
            .map(|point| {
                let on = function.on.iter().any(|c| c.holds(point));
                let off = function.off.iter().any(|c| c.holds(point));
                assert!(!(on && off), "{}: point {point} is in both sets", function.name);
                (on || off).then_some(on != dual)
            })
            .collect();
        let mut covering = Covering { variables, values, required: Vec::new(), privileged: Vec::new() };
        for t in &function.transitions {
            let way = Cube::spanned(t.start, t.end, variables);
            match (t.values.0 != dual, t.values.1 != dual) {
                (true, true) => covering.required.push(way),
                (false, false) => {}
                (true, false) => covering.changes(way, t.start),
                (false, true) => covering.changes(way, t.end),
            }
        }
        // A burst that switches a latch: the side that was free to be on while the latch idled must be off when the burst
        // ends, and must not come back before.
        let partner = match function.target {
            Target::Set(bit) => Some(Target::Reset(bit)),
            Target::Reset(bit) => Some(Target::Set(bit)),
            Target::Next(_) | Target::Output(_) => None,
        };
        for other in equations.functions.iter().filter(|f| Some(f.target) == partner) {
            for t in &other.transitions {
                if t.phase == Phase::Input && t.values == (false, true) {
                    let way = Cube::spanned(t.start, t.end, variables);
                    covering.privileged.push((way, if dual { t.end } else { t.start }));
                }
            }
        }
        covering.required.sort_unstable();
        covering.required.dedup();
        covering
    }

    /// A function that changes over `way` and is 1 at `end`.
    fn changes(&mut self, way: Cube, end: u32) {
        self.privileged.push((way, end));
        let free = !way.care & mask(self.variables);
        let ones: Vec<Cube> = submasks(free)
            .map(|fixed| {
                let care = way.care | fixed;
                Cube { care, ones: end & care }
            })
            .filter(|&cube| self.points(cube).all(|p| self.values[p as usize] == Some(true)))
            .collect();
        let largest = ones.iter().filter(|c| !ones.iter().any(|d| d != *c && d.contains(**c)));
        self.required.extend(largest);
    }

    /// The points of a cube.
    fn points(&self, cube: Cube) -> impl Iterator<Item = u32> {
        submasks(!cube.care & mask(self.variables)).map(move |free| cube.ones | free)
    }

    /// Points that must be 1.
    pub fn on_points(&self) -> impl Iterator<Item = u32> {
        (0..1u32 << self.variables).filter(|&p| self.values[p as usize] == Some(true))
    }

    /// All products that hold no point of the off-set and meet no privileged cube without its point, those inside another
    /// left out. All `3^variables` cubes are tried.
    pub fn candidates(&self) -> Vec<Cube> {
        let all = mask(self.variables);
        let mut allowed = vec![false; 1 << (2 * self.variables)];
        let at = |c: Cube| (c.care as usize) << self.variables | c.ones as usize;
        let mut found = Vec::new();
        // Fewer literals first, so that larger cubes are known when smaller ones ask.
        let mut cares: Vec<u32> = (0..=all).collect();
        cares.sort_by_key(|c| c.count_ones());
        for care in cares {
            for ones in submasks(care) {
                let cube = Cube { care, ones };
                let may = self.points(cube).all(|p| self.values[p as usize] != Some(false))
                    && self.privileged.iter().all(|&(way, end)| !cube.meets(way) || cube.holds(end));
                let inside = submasks(care)
                    .filter(|&fewer| fewer != care)
                    .any(|fewer| allowed[at(Cube { care: fewer, ones: ones & fewer })]);
                allowed[at(cube)] = may;
                if may && !inside {
                    found.push(cube);
                }
            }
        }
        found
    }
}

/// The primes of a function that is 1 or free at `points` and 0 elsewhere: cubes inside `points`, none inside another.
pub fn primes(points: &[u32], variables: usize) -> Vec<Cube> {
    let mut values = vec![Some(false); 1 << variables];
    for &p in points {
        values[p as usize] = None;
    }
    Covering { variables, values, required: Vec::new(), privileged: Vec::new() }.candidates()
}

/// All masks inside `of`, the empty one and `of` included.
pub fn submasks(of: u32) -> impl Iterator<Item = u32> {
    let mut next = Some(0u32);
    std::iter::from_fn(move || {
        let now = next?;
        next = (now != of).then(|| now.wrapping_sub(of) & of);
        Some(now)
    })
}

/// What is wrong with a closed cover of a table, in words; `None` if nothing is [Grasselli & Luccio 1965].
pub fn cover_fault(table: &FlowTable, apart: &[Vec<bool>], cover: &[Vec<Row>]) -> Option<String> {
    if let Some(r) = table.rows().find(|r| !cover.iter().any(|set| set.contains(r))) {
        return Some(format!("{} is in no set", table.name(r)));
    }
    for set in cover {
        if let Some((a, b)) =
            set.iter().flat_map(|a| set.iter().map(move |b| (a, b))).find(|(a, b)| apart[a.at()][b.at()])
        {
            return Some(format!("{} and {} are incompatible", table.name(*a), table.name(*b)));
        }
        for c in table.columns() {
            let next: Vec<Row> = set.iter().filter_map(|&r| table.next(r, c)).collect();
            let holds_all = |t: &Vec<Row>| next.iter().all(|n| t.contains(n));
            let inner = set.iter().any(|&r| table.cell(r, c).inner);
            if !cover.iter().any(holds_all) || inner && !holds_all(set) {
                return Some(format!("{set:?} is open in {}", table.column_text(c)));
            }
        }
    }
    None
}
