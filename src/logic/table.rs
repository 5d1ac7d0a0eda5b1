//! The encoded design, point by point: next codes, outputs, and the transitions that can happen [methods: from codes to
//! functions; S. H. Unger, "Asynchronous Sequential Switching Circuits", 1969].
//!
//! Every move that can happen is laid out for every code of the row it starts in: the input change (a cube from start to
//! the same code in the new column), then the steps of its way. On the way an output that the table leaves open gets the
//! value of the destination (*early*), or keeps the old one if the user asked for that (*late*). Linear in the moves times
//! the points of their cubes, with a binary search for each.

use std::collections::BTreeMap;

use crate::base::{Code, Column, Outputs, Row};
use crate::codes::values::{Coded, Step, Way};
use crate::logic::cubes::points_of;
use crate::logic::per_row;
use crate::logic::values::{Cube, Phase, Target, mask, point};
use crate::merge::values::Reduced;
use crate::project::choices::OutputStyle;
use crate::spec::values::Move;

/// The design over the points (inputs, state variables).
#[derive(Debug, Clone)]
pub(crate) struct Table {
    /// Number of inputs.
    pub(crate) inputs: usize,
    /// Number of state variables.
    pub(crate) bits: usize,
    /// The points that have anything specified, ascending.
    pub(crate) points: Vec<u32>,
    /// The next code of each point, where it is specified.
    pub(crate) next: Vec<Option<Code>>,
    /// The outputs of each point: what the reduced table gives, and what the moves add.
    pub(crate) outputs: Vec<Outputs>,
    /// Outputs whose value at the point (the unstable cell between two ends) may also be the old one.
    pub(crate) choice: Vec<u32>,
    /// The transitions.
    pub(crate) spans: Vec<Span>,
    /// What cannot be.
    pub(crate) faults: Vec<Fault>,
}

/// A cube in which functions must not glitch.
#[derive(Debug, Clone)]
pub(crate) struct Span {
    /// Index of the move in the reduced table's list.
    pub(crate) cause: usize,
    /// Its part.
    pub(crate) phase: Phase,
    /// Index of the start point.
    pub(crate) start: usize,
    /// Index of the end point.
    pub(crate) end: usize,
    /// Indices of all points between and both ends, if more than one variable changes.
    pub(crate) inside: Vec<usize>,
    /// Whether it binds the excitations (the first of several equal ones does).
    pub(crate) state: bool,
    /// The outputs that it binds.
    pub(crate) outputs: u32,
}

/// Something that no function can do.
#[derive(Debug, Clone)]
pub(crate) struct Fault {
    /// The function.
    pub(crate) target: Target,
    /// The moves that disagree.
    pub(crate) moves: Vec<usize>,
    /// Why, and what would help.
    pub(crate) text: String,
}

impl Table {
    /// Lays out the design. `late`: outputs that keep their old value on the way.
    pub(crate) fn new(reduced: &Reduced, coded: &Coded, late: u32) -> Table {
        let mut table = Table::with_points(reduced, coded);
        let ways = index_ways(coded);
        let per_row = reduced.outputs == OutputStyle::PerRow;
        table.given_outputs(reduced, coded);
        let mut layer = Layer::new(&table);
        for (cause, mv) in reduced.moves.iter().enumerate() {
            for &code in &coded.codes[mv.from.row.at()] {
                let way = ways.get(&(mv.from.row, mv.column, code)).copied();
                table.follow(reduced, Run { cause, mv, code, way, late, per_row }, &mut layer);
            }
        }
        if per_row {
            per_row::settle(&mut table, reduced, coded, &layer.runs);
        }
        table.finish(layer);
        table
    }

    /// Number of variables.
    pub(crate) fn variables(&self) -> usize {
        self.inputs + self.bits
    }

    /// The state variables, as a mask of points.
    pub(crate) fn state_mask(&self) -> u32 {
        mask(self.variables()) & !mask(self.inputs)
    }

    /// The code of a point.
    pub(crate) fn code(&self, at: usize) -> Code {
        Code(self.points[at] >> self.inputs)
    }

    /// Index of a point.
    pub(crate) fn find(&self, point: u32) -> Option<usize> {
        self.points.binary_search(&point).ok()
    }

    /// The cube that two points span, by their indices.
    pub(crate) fn cube(&self, a: usize, b: usize) -> Cube {
        Cube::spanned(self.points[a], self.points[b], self.variables())
    }

    /// All points of the encoded table, of cells with outputs, and of the cubes that moves pass.
    fn with_points(reduced: &Reduced, coded: &Coded) -> Table {
        let (inputs, bits) = (reduced.table.inputs, coded.bits);
        let at = |column: Column, code: Code| point(column, code, inputs);
        let mut points: Vec<u32> = coded.encoded.entries.keys().map(|&(q, c)| at(c, q)).collect();
        for row in reduced.table.rows() {
            let cells = reduced.table.row_cells(row);
            for &code in &coded.codes[row.at()] {
                for column in reduced.table.columns() {
                    let cell = cells[column.at()];
                    if cell.next.is_none() && cell.outputs.care != 0 {
                        points.push(at(column, code));
                    }
                }
            }
        }
        for mv in reduced.moves.iter().filter(|m| m.from.column.distance(m.column) > 1) {
            for &code in &coded.codes[mv.from.row.at()] {
                points.extend(mv.from.column.between(mv.column).map(|c| at(c, code)));
            }
        }
        points.sort_unstable();
        points.dedup();
        let count = points.len();
        let mut table = Table {
            inputs,
            bits,
            points,
            next: vec![None; count],
            outputs: vec![Outputs::default(); count],
            choice: vec![0; count],
            spans: Vec::new(),
            faults: Vec::new(),
        };
        for (&(code, column), entry) in &coded.encoded.entries {
            if let Some(i) = table.find(at(column, code)) {
                table.next[i] = Some(entry.next);
            }
        }
        table
    }

    /// The outputs of the reduced table, at all codes of each row.
    fn given_outputs(&mut self, reduced: &Reduced, coded: &Coded) {
        for row in reduced.table.rows() {
            let cells = reduced.table.row_cells(row);
            for &code in &coded.codes[row.at()] {
                for column in reduced.table.columns() {
                    let outputs = cells[column.at()].outputs;
                    if outputs.care != 0
                        && let Some(i) = self.find(point(column, code, self.inputs))
                    {
                        self.outputs[i] = outputs;
                    }
                }
            }
        }
    }

    /// Lays out one move from one code.
    fn follow(&mut self, reduced: &Reduced, run: Run<'_>, layer: &mut Layer) {
        let Run { cause, mv, code, way, .. } = run;
        let before = reduced.table.cell(mv.from.row, mv.from.column).outputs;
        let after = reduced.table.cell(mv.to, mv.column).outputs;
        let bound = before.care & after.care;
        let (Some(start), Some(turn)) = (
            self.find(point(mv.from.column, code, self.inputs)),
            self.find(point(mv.column, code, self.inputs)),
        ) else {
            return;
        };
        let inside = self.inside(start, turn);
        for &i in inside.iter().filter(|&&i| i != start && i != turn) {
            self.wait(i, code, cause);
            if !run.per_row {
                layer.fill(self, i, Outputs { care: bound, ones: before.ones & bound }, cause);
                layer.hard[i] |= bound;
            }
        }
        self.span(
            layer,
            Span { cause, phase: Phase::Input, start, end: turn, inside, state: true, outputs: bound },
        );
        let Some(way) = way.filter(|_| mv.to != mv.from.row) else {
            return;
        };
        let path: Vec<usize> =
            way.path.iter().filter_map(|&q| self.find(point(mv.column, q, self.inputs))).collect();
        let (Some(&first), Some(&last)) = (path.first(), path.last()) else { return };
        let passed: Vec<usize> = match way.step {
            Step::OneBit => path.clone(),
            Step::Together => self.cube_of(first, last),
        };
        if !run.per_row {
            self.fill_way(&run, before, after, &passed, last, layer);
        }
        match way.step {
            Step::OneBit => {
                for (n, step) in path.windows(2).enumerate() {
                    let (start, end, phase) = (step[0], step[1], Phase::State(n));
                    self.span(
                        layer,
                        Span { cause, phase, start, end, inside: Vec::new(), state: true, outputs: bound },
                    );
                }
            }
            Step::Together => {
                let inside = self.inside(first, last);
                let phase = Phase::State(0);
                self.span(
                    layer,
                    Span { cause, phase, start: first, end: last, inside, state: true, outputs: bound },
                );
            }
        }
        layer.runs.push(Passage { cause, start, passed, path, together: way.step == Step::Together, bound });
    }

    /// The outputs at the points of a way but its last.
    fn fill_way(
        &mut self,
        run: &Run<'_>,
        before: Outputs,
        after: Outputs,
        passed: &[usize],
        last: usize,
        layer: &mut Layer,
    ) {
        let bound = before.care & after.care;
        let late = bound & run.late;
        let value = Outputs { care: bound, ones: (before.ones & late) | (after.ones & bound & !late) };
        let short = passed.len() == 2 && run.mv.from.column.distance(run.mv.column) == 1;
        let soft = if short { bound & !late & (before.ones ^ after.ones) } else { 0 };
        for &i in passed.iter().filter(|&&i| i != last) {
            layer.fill(self, i, value, run.cause);
            layer.soft[i] |= soft;
            layer.hard[i] |= bound & !soft;
        }
    }

    /// In the middle of a burst the code stays.
    fn wait(&mut self, at: usize, code: Code, cause: usize) {
        match self.next[at] {
            None => self.next[at] = Some(code),
            Some(next) => {
                for i in (0..self.bits).filter(|i| (next.0 ^ code.0) >> i & 1 == 1) {
                    self.faults.push(Fault {
                        target: Target::Next(i),
                        moves: vec![cause],
                        text: "the state would change before the burst is complete; a closed cover whose sets stay \
                               in the inner cells of the burst would help"
                            .into(),
                    });
                }
            }
        }
    }

    /// Adds a transition, but for what an equal one binds already.
    fn span(&mut self, layer: &mut Layer, mut span: Span) {
        let seen = layer.seen.entry((span.start, span.end)).or_insert((false, 0));
        span.state = !seen.0;
        span.outputs &= !seen.1;
        seen.0 = true;
        seen.1 |= span.outputs;
        if span.state || span.outputs != 0 {
            self.spans.push(span);
        }
    }

    /// Indices of the points of the cube between two, if it is more than an edge.
    fn inside(&self, a: usize, b: usize) -> Vec<usize> {
        if (self.points[a] ^ self.points[b]).count_ones() < 2 { Vec::new() } else { self.cube_of(a, b) }
    }

    fn cube_of(&self, a: usize, b: usize) -> Vec<usize> {
        let cube = Cube::spanned(self.points[a], self.points[b], self.variables());
        points_of(cube, mask(self.variables())).filter_map(|p| self.find(p)).collect()
    }

    /// Settles the outputs: what the moves filled, choices that nothing else decided, and whether each output changes at
    /// most once along every way.
    fn finish(&mut self, layer: Layer) {
        let given: Vec<u32> = self.outputs.iter().map(|o| o.care).collect();
        for (i, given) in given.iter().enumerate() {
            self.choice[i] = layer.soft[i] & !layer.hard[i] & !given;
            self.outputs[i] = self.outputs[i].or(layer.filled[i].0);
        }
        for passage in layer.runs.iter().filter(|p| !p.together) {
            let twice = passage.bound & self.twice(passage, &given);
            self.refuse_twice(twice, passage.cause);
        }
    }

    /// The outputs that change more than once along a passage of single steps. Where the user gave the output of the
    /// unstable cell, the change into it was asked for (the checks warn if it makes a pulse) and does not count.
    fn twice(&self, passage: &Passage, given: &[u32]) -> u32 {
        let Some(&turn) = passage.path.first() else { return 0 };
        let mut last = self.outputs[turn].ones;
        let mut changed = (self.outputs[passage.start].ones ^ last) & !given[turn];
        let mut twice = 0;
        for &i in &passage.path {
            let now = self.outputs[i].ones;
            twice |= changed & (now ^ last);
            changed |= now ^ last;
            last = now;
        }
        twice
    }

    fn refuse_twice(&mut self, outputs: u32, cause: usize) {
        for j in (0..32).filter(|j| outputs >> j & 1 == 1) {
            self.faults.push(Fault {
                target: Target::Output(j),
                moves: vec![cause],
                text: "the output would change more than once on the way, through a cell of another row; codes by \
                       another method, or leaving that cell's output open, would help"
                    .into(),
            });
        }
    }
}

/// A move from one of its codes.
#[derive(Clone, Copy)]
struct Run<'r> {
    cause: usize,
    mv: &'r Move,
    code: Code,
    way: Option<&'r Way>,
    late: u32,
    per_row: bool,
}

/// A way as it is passed by a move.
pub(crate) struct Passage {
    /// The move.
    pub(crate) cause: usize,
    /// Index of the point where the move starts.
    pub(crate) start: usize,
    /// The points of the way in order, or both ends if all bits change at once.
    pub(crate) path: Vec<usize>,
    /// All points that may be passed, ends included.
    pub(crate) passed: Vec<usize>,
    /// Whether all bits change at once.
    pub(crate) together: bool,
    /// Outputs that are specified at both ends of the move.
    pub(crate) bound: u32,
}

/// What the moves add while they are laid out.
struct Layer {
    /// Outputs filled at each point, and the move that first did.
    filled: Vec<(Outputs, usize)>,
    soft: Vec<u32>,
    hard: Vec<u32>,
    seen: BTreeMap<(usize, usize), (bool, u32)>,
    runs: Vec<Passage>,
}

impl Layer {
    fn new(table: &Table) -> Layer {
        let count = table.points.len();
        Layer {
            filled: vec![(Outputs::default(), 0); count],
            soft: vec![0; count],
            hard: vec![0; count],
            seen: BTreeMap::new(),
            runs: Vec::new(),
        }
    }

    /// Gives outputs to a point, where the table does not.
    fn fill(&mut self, table: &mut Table, at: usize, value: Outputs, cause: usize) {
        let open = value.care & !table.outputs[at].care;
        let value = Outputs { care: open, ones: value.ones & open };
        let (have, first) = self.filled[at];
        let clash = have.conflicts(value);
        for j in (0..32).filter(|j| clash >> j & 1 == 1) {
            table.faults.push(Fault {
                target: Target::Output(j),
                moves: vec![first, cause],
                text: "both moves pass one point on their way, and ask for different values of the output there; \
                       an output that changes early, or codes by another method, would help"
                    .into(),
            });
        }
        self.filled[at] = (have.or(value), if have.care == 0 { cause } else { first });
    }
}

fn index_ways(coded: &Coded) -> BTreeMap<(Row, Column, Code), &Way> {
    coded.ways.iter().filter_map(|w| Some(((w.from, w.column, *w.path.first()?), w))).collect()
}
