//! The smallest closed cover, proved, and among the smallest the one that is best by the rules below.
//!
//! For k = size of a largest clique of rows that exclude each other, k+1, ..: is there a closed cover of k sets? The first
//! k for which there is one is the optimum, and every smaller k was refuted on the way. Among the covers of k sets those
//! with fewest members in total are preferred (disjoint ones first: they have none to spare), and among these the first
//! in row order: sets compared as ascending lists, the cover as the sorted list of its sets. Both preferences are settled
//! by further questions to the same solver, so the result does not depend on which cover the solver happens to find.
//! Where the effort runs out the best cover known is returned, and what is not proved is said.
//!
//! # Complexity
//!
//! Exponential at worst, as the problem is NP-hard already for its bound (graph colouring). One question for each k up to
//! the optimum, then at most two for each member of the cover; nearly all of the latter are settled by propagation.
//!
//! # References
//!
//! - A. Grasselli and F. Luccio, "A method for minimizing the number of internal states in incompletely specified
//!   sequential networks", IEEE Trans. on Electronic Computers EC-14, 1965.
//! - N. Eén and N. Sörensson, "Temporal induction by incremental SAT solving", Electronic Notes in Theoretical Computer
//!   Science 89, 2003 (questions under assumptions).

use fixedbitset::FixedBitSet;

use crate::base::{Bound, Effort, Halted, Progress};
use crate::merge::greedy;
use crate::merge::model::{Model, Truth, not};
use crate::merge::problem::Problem;
use crate::merge::values::RowSet;
use crate::search::sat::Lit;

/// What the search found.
pub(super) struct Smallest {
    /// The best cover.
    pub(super) cover: Vec<RowSet>,
    /// The next best of the same number of sets, as many as asked for and as there are.
    pub(super) further: Vec<Vec<RowSet>>,
    /// Proved lower bound on the number of sets.
    pub(super) lower: usize,
    /// Whether the number of sets is proved.
    pub(super) bound: Bound,
    /// Whether `cover` and `further` are proved best by the rules above.
    pub(super) tie_proved: bool,
}

/// The best closed cover, and the next best up to `covers` in all.
pub(super) fn smallest(problem: &Problem, covers: usize, effort: &Effort) -> Smallest {
    let report = |bound| effort.report(&Progress { task: "smallest closed cover", best: None, bound });
    for sets in problem.clique.len().max(1)..=problem.rows {
        report(sets);
        match best_of_size(problem, sets, &[], effort) {
            Ok(None) => {}
            Ok(Some(best)) => return with_further(problem, best, covers, effort),
            Err(Halted) => return halted(problem, sets),
        }
    }
    // Every row by itself is always a closed cover, so only an empty table comes here.
    Smallest { cover: Vec::new(), further: Vec::new(), lower: 0, bound: Bound::Proved, tie_proved: true }
}

/// The largest proved lower bound on the number of sets that is not above `most`, for which a cover is known.
pub(super) fn lower_bound(problem: &Problem, most: usize, effort: &Effort) -> usize {
    for sets in problem.clique.len()..most {
        let fits = Model::new(problem, sets, effort).and_then(|mut model| model.sat.solve(&[], effort));
        if fits != Ok(false) {
            return sets;
        }
    }
    most
}

/// The best cover found for a number of sets, and whether it is proved best.
struct Best {
    cover: Vec<RowSet>,
    proved: bool,
}

/// The best closed cover of exactly `sets` sets that is none of `forbidden`; `None` if there is none.
fn best_of_size(
    problem: &Problem,
    sets: usize,
    forbidden: &[Vec<RowSet>],
    effort: &Effort,
) -> Result<Option<Best>, Halted> {
    if let Some(cover) = only_cover(problem, sets) {
        return Ok((!forbidden.contains(&cover)).then_some(Best { cover, proved: true }));
    }
    let mut model = Model::new(problem, sets, effort)?;
    for cover in forbidden {
        model.forbid(cover);
    }
    let disjoint = model.disjoint;
    if model.sat.solve(&[disjoint], effort)? {
        let cover = model.found();
        model.sat.clause(&[disjoint]);
        return Ok(Some(first_in_order(problem, &mut model, cover, true, effort)));
    }
    if !model.sat.solve(&[], effort)? {
        return Ok(None);
    }
    let cover = model.found();
    Ok(Some(fewest_members(problem, &mut model, cover, effort)))
}

/// Where there is nothing to search: one set holds everything, or every row stands alone.
fn only_cover(problem: &Problem, sets: usize) -> Option<Vec<RowSet>> {
    let n = problem.rows;
    let excluded = problem.clique.len();
    if excluded == n {
        return Some((0..n).map(|r| FixedBitSet::from_iter([r])).map(|s| widened(s, n)).collect());
    }
    if sets == 1 && excluded == 1 && problem.all_together() {
        let mut all = FixedBitSet::with_capacity(n);
        all.insert_range(..);
        return Some(vec![all]);
    }
    None
}

fn widened(mut set: RowSet, rows: usize) -> RowSet {
    set.grow(rows);
    set
}

fn with_further(problem: &Problem, best: Best, covers: usize, effort: &Effort) -> Smallest {
    let sets = best.cover.len();
    let mut known = vec![best.cover];
    let mut tie_proved = best.proved;
    while known.len() < covers {
        match best_of_size(problem, sets, &known, effort) {
            Ok(Some(next)) => {
                tie_proved &= next.proved;
                known.push(next.cover);
            }
            Ok(None) => break,
            Err(Halted) => {
                tie_proved = false;
                break;
            }
        }
    }
    let cover = known.remove(0);
    Smallest { cover, further: known, lower: sets, bound: Bound::Proved, tie_proved }
}

/// The search ended with no cover of `sets` sets, and all smaller numbers refuted.
fn halted(problem: &Problem, sets: usize) -> Smallest {
    let cover = greedy::closed_partition(problem);
    let bound = if cover.len() == sets { Bound::Proved } else { Bound::Stopped { lower: sets } };
    Smallest { cover, further: Vec::new(), lower: sets, bound, tie_proved: false }
}

/// No disjoint cover exists: finds the fewest members that do, then the first cover in order.
fn fewest_members<'p>(
    problem: &'p Problem,
    model: &mut Model<'p>,
    mut cover: Vec<RowSet>,
    effort: &Effort,
) -> Best {
    let mut extra = 1;
    while extra < spare_members(&cover, problem.rows) {
        let limit = model.at_most_extra(extra);
        match model.sat.solve(&[limit], effort) {
            Ok(true) => {
                cover = model.found();
                break;
            }
            Ok(false) => extra += 1,
            Err(Halted) => return Best { cover, proved: false },
        }
    }
    let limit = model.at_most_extra(spare_members(&cover, problem.rows));
    model.sat.clause(&[limit]);
    first_in_order(problem, model, cover, false, effort)
}

fn spare_members(cover: &[RowSet], rows: usize) -> usize {
    cover.iter().map(|set| set.count_ones(..)).sum::<usize>() - rows
}

/// The first cover in order among those that the model allows; `cover` is one of them. Whatever is settled on the way
/// becomes a clause, so the model is good for nothing else afterwards.
fn first_in_order<'p>(
    problem: &'p Problem,
    model: &mut Model<'p>,
    cover: Vec<RowSet>,
    disjoint: bool,
    effort: &Effort,
) -> Best {
    let mut order =
        Order { problem, model, cover, disjoint, settled: Vec::new(), places: Vec::new(), effort };
    // Of disjoint sets the last is what the others leave.
    let count = order.cover.len() - usize::from(disjoint);
    let proved = (0..count).all(|position| order.settle(position).is_ok());
    Best { cover: order.cover, proved }
}

/// The search for the first cover in order, one set after the other.
struct Order<'a, 'p, 'e> {
    problem: &'p Problem,
    model: &'a mut Model<'p>,
    /// The best cover so far; its first sets are settled.
    cover: Vec<RowSet>,
    disjoint: bool,
    /// Sets of the model whose position in the cover is known.
    settled: Vec<usize>,
    /// For each position that is settled, but not which set of the model it is: a literal for each set.
    places: Vec<Vec<(usize, Lit)>>,
    effort: &'a Effort<'e>,
}

impl Order<'_, '_, '_> {
    /// Makes the set at `position` the first possible one in order, given all before it.
    fn settle(&mut self, position: usize) -> Result<(), Halted> {
        let holds = self.select(position);
        let ends = self.ends(&holds);
        // What is proved of the set: it holds exactly the rows of `prefix` among those below `from`.
        let mut prefix: Vec<usize> = Vec::new();
        let mut from = 0;
        loop {
            let set = &self.cover[position];
            let Some(next) = set.ones().find(|&r| r >= from) else { break };
            if !prefix.is_empty() && self.may_end(&prefix) {
                if self.model.sat.solve(&[ends[from]], self.effort)? {
                    self.cover = self.model.found();
                    break;
                }
                self.model.sat.clause(&[!ends[from]]);
            }
            let next = self.lowest_next(position, &holds, &prefix, from, next)?;
            self.model.clause(&[holds[next]]);
            prefix.push(next);
            from = next + 1;
        }
        if let Some(&end) = ends.get(from) {
            self.model.sat.clause(&[end]);
        }
        self.note_place(position);
        Ok(())
    }

    /// The lowest row that can come next after `prefix`; `next` is one that can.
    fn lowest_next(
        &mut self,
        position: usize,
        holds: &[Truth],
        prefix: &[usize],
        from: usize,
        mut next: usize,
    ) -> Result<usize, Halted> {
        loop {
            let gap: Vec<Truth> = (from..next)
                .filter(|&r| prefix.iter().all(|&p| !self.problem.apart.joined(p, r)))
                .map(|r| holds[r])
                .filter(|&t| t != Truth::No)
                .collect();
            if gap.is_empty() {
                return Ok(next);
            }
            let asked = self.model.sat.variable();
            let mut clause = gap.clone();
            clause.push(Truth::If(!asked));
            self.model.clause(&clause);
            if !self.model.sat.solve(&[asked], self.effort)? {
                for row in gap {
                    self.model.clause(&[not(row)]);
                }
                return Ok(next);
            }
            self.cover = self.model.found();
            next = self.cover[position].ones().find(|&r| r >= from).unwrap_or(next);
        }
    }

    /// Whether the set could consist of `prefix` alone, as far as the clique tells.
    fn may_end(&self, prefix: &[usize]) -> bool {
        let clique = &self.problem.clique;
        clique.len() < self.model.sets || clique.iter().any(|r| prefix.contains(r))
    }

    /// Statements "the set at `position` holds row r".
    fn select(&mut self, position: usize) -> Vec<Truth> {
        let n = self.problem.rows;
        // Disjoint sets follow each other by their first rows, and the first row not yet covered is known.
        let leader = self.disjoint.then(|| self.cover[position].minimum().unwrap_or(0));
        let open: Vec<usize> = (0..self.model.sets)
            .filter(|s| !self.settled.contains(s))
            .filter(|&s| leader.is_none_or(|l| self.model.inside(s, l) != Truth::No))
            .collect();
        if let [only] = open[..] {
            self.settled.push(only);
            return (0..n).map(|r| self.model.inside(only, r)).collect();
        }
        let places: Vec<(usize, Lit)> = open.iter().map(|&s| (s, self.model.sat.variable())).collect();
        let any: Vec<Lit> = places.iter().map(|&(_, lit)| lit).collect();
        self.model.sat.clause(&any);
        self.model.sat.at_most_one(&any);
        for earlier in &self.places {
            for &(s, here) in &places {
                for &(_, there) in earlier.iter().filter(|&&(t, _)| t == s) {
                    self.model.sat.clause(&[!here, !there]);
                }
            }
        }
        let holds = (0..n).map(|r| self.held_by_selected(r, leader, position, &places)).collect();
        self.places.push(places);
        holds
    }

    fn held_by_selected(
        &mut self,
        row: usize,
        leader: Option<usize>,
        position: usize,
        places: &[(usize, Lit)],
    ) -> Truth {
        if let Some(leader) = leader {
            let taken = self.cover[..position].iter().any(|set| set.contains(row));
            if taken || self.problem.apart.joined(leader, row) {
                return Truth::No;
            }
        }
        let holds = Truth::If(self.model.sat.variable());
        for &(s, here) in places {
            let inside = self.model.inside(s, row);
            self.model.clause(&[Truth::If(!here), not(inside), holds]);
            self.model.clause(&[Truth::If(!here), inside, not(holds)]);
        }
        if leader == Some(row) {
            self.model.clause(&[holds]);
        }
        holds
    }

    /// Literals "the set holds no row from r on".
    fn ends(&mut self, holds: &[Truth]) -> Vec<Lit> {
        let ends: Vec<Lit> = holds.iter().map(|_| self.model.sat.variable()).collect();
        for (r, &end) in ends.iter().enumerate() {
            self.model.clause(&[Truth::If(!end), not(holds[r])]);
            if let Some(&later) = ends.get(r + 1) {
                self.model.sat.clause(&[!end, later]);
            }
        }
        ends
    }

    /// Remembers which set of the model stands at a position, if the clique says so.
    fn note_place(&mut self, position: usize) {
        let clique = &self.problem.clique;
        if clique.len() < self.model.sets {
            return;
        }
        let set = &self.cover[position];
        let Some(s) = clique.iter().position(|&r| set.contains(r)) else { return };
        if !self.settled.contains(&s) {
            self.settled.push(s);
            if let Some(&(_, here)) = self.places.last().and_then(|p| p.iter().find(|&&(t, _)| t == s)) {
                self.model.sat.clause(&[here]);
            }
        }
    }
}
