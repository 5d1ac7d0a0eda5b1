//! Which input changes the discipline allows from each stable cell, and what the cells on the way hold.
//!
//! With single input changes, a stable cell leads to the cells of its row that differ in one input. With bursts it
//! leads to every specified cell of its row whose way is *clean*: each column strictly in between is unspecified or
//! stable and contradicts no output of the start. A cell that can be entered from no start, or only past a nearer start
//! whose way is not clean, is an ambiguous burst. What lies strictly inside a clean way is filled in as "stay, outputs
//! hold" and marked inner.
//!
//! Source: the generalised fundamental mode of burst-mode controllers (Nowick and Dill, 1990s), put in terms of rows.
//! Exact. Cost for `n` inputs: `O(n)` for each start with single changes, `O(n 2^n / 64 + 2^n)` with bursts.

use crate::base::{Column, Outputs, Row, TotalState};
use crate::project::Project;
use crate::project::choices::Discipline;
use crate::spec::columns::ColumnSet;
use crate::spec::names::{outputs_in, shown};
use crate::spec::report::{Report, Spot};
use crate::spec::values::FlowTable;

/// Input changes of one table, at most. Four thousand for each of a thousand rows.
const MOVES: usize = 1 << 22;

/// A stable cell and the columns that its row may be brought to from there.
#[derive(Debug, Clone, Copy)]
pub struct Start {
    /// The stable cell.
    pub at: TotalState,
    targets: (u32, u32),
}

/// All allowed and specified input changes of a table, reachable or not.
#[derive(Debug, Clone, Default)]
pub struct Ways {
    starts: Vec<Start>,
    rows: Vec<u32>,
    targets: Vec<Column>,
}

impl Ways {
    /// Every start, by row and column.
    pub fn starts(&self) -> &[Start] {
        &self.starts
    }

    /// The starts of a row, by column.
    pub fn of_row(&self, row: Row) -> &[Start] {
        &self.starts[self.rows[row.at()] as usize..self.rows[row.at() + 1] as usize]
    }

    /// The start at a total state, if it is a stable cell of the table as given.
    pub fn start(&self, at: TotalState) -> Option<&Start> {
        let starts = self.of_row(at.row);
        starts.binary_search_by_key(&at.column, |start| start.at.column).ok().map(|i| &starts[i])
    }

    /// The columns that a start leads to, nearest first.
    pub fn targets(&self, start: &Start) -> &[Column] {
        &self.targets[start.targets.0 as usize..start.targets.1 as usize]
    }

    fn add(&mut self, at: TotalState, targets: impl Iterator<Item = Column>) {
        let first = self.targets.len();
        self.targets.extend(targets);
        self.targets[first..].sort_unstable_by_key(|column| (column.distance(at.column), column.0));
        self.starts.push(Start { at, targets: (first as u32, self.targets.len() as u32) });
    }
}

/// Finds all ways of the table and, with bursts, fills in the inner cells. `None` if there are too many.
pub fn ways(table: &mut FlowTable, project: &Project, report: &mut Report) -> Option<Ways> {
    let mut ways = Ways { rows: vec![0], ..Ways::default() };
    for row in table.rows() {
        match project.discipline {
            Discipline::Single => single_ways(table, row, &mut ways),
            Discipline::Burst => burst_ways(table, row, project, &mut ways, report),
        }
        ways.rows.push(ways.starts.len() as u32);
        if ways.targets.len() > MOVES {
            report.error("limit-moves", Spot::NOWHERE, || {
                format!(
                    "The table allows more than {MOVES} input changes. Use fewer stable cells in a row, or split the \
                     controller."
                )
            });
            return None;
        }
    }
    Some(ways)
}

/// Gives open outputs of unstable cells the value that is the same on both sides of a move.
pub fn hold_outputs(table: &mut FlowTable, ways: &Ways) {
    for start in ways.starts() {
        let row = start.at.row;
        let from = table.cell(row, start.at.column).outputs;
        for &column in ways.targets(start) {
            let Some(next) = table.next(row, column).filter(|&next| next != row) else { continue };
            let to = table.cell(next, column).outputs;
            let same = from.care & to.care & !from.conflicts(to);
            let cell = table.cell_mut(row, column);
            cell.outputs = cell.outputs.or(Outputs { care: same, ones: to.ones & same });
        }
    }
}

fn single_ways(table: &FlowTable, row: Row, ways: &mut Ways) {
    for column in table.columns().filter(|&column| table.stable(row, column)) {
        let near = (0..table.inputs).map(|i| Column(column.0 ^ 1 << i));
        ways.add(TotalState { row, column }, near.filter(|&to| table.next(row, to).is_some()));
    }
}

fn burst_ways(table: &mut FlowTable, row: Row, project: &Project, ways: &mut Ways, report: &mut Report) {
    let inputs = table.inputs;
    let mut given = ColumnSet::new(inputs);
    let mut stable = ColumnSet::new(inputs);
    for column in table.columns() {
        if let Some(next) = table.next(row, column) {
            given.insert(column);
            if next == row {
                stable.insert(column);
            }
        }
    }
    let left = given.minus(&stable);
    // For each unstable cell the nearest start whose way there is clean, and the nearest whose way is not.
    let mut nearest = vec![Nearest::default(); 1 << inputs];
    let mut inner_of = Vec::new();
    for start in stable.iter() {
        let blocked = blocked(table, row, start, &left).seen_from(start);
        let unclean = blocked.strictly_above();
        let mut given = given.seen_from(start);
        given.remove(Column(0));
        let clean = given.minus(&unclean);
        let mut inner = clean.strictly_below();
        inner.remove(Column(0));
        inner_of.push((start, inner.seen_from(start)));
        for way in given.and(&unclean).iter() {
            nearest[usize::from(way.0 ^ start.0)].unclean(start, way.0.count_ones());
        }
        for way in clean.iter() {
            nearest[usize::from(way.0 ^ start.0)].clean(way.0.count_ones());
        }
        ways.add(TotalState { row, column: start }, clean.iter().map(|way| Column(way.0 ^ start.0)));
        if ways.targets.len() > MOVES {
            return;
        }
    }
    for column in left.iter() {
        if let Some(start) = nearest[column.at()].ambiguous() {
            report_ambiguous(table, row, start, column, &blocked(table, row, start, &left), report);
        }
    }
    fill_inner(table, row, &stable, &inner_of);
    for &(start, inner) in &inner_of {
        report_lost_hold(table, row, start, &inner, project, report);
    }
}

/// Distances of the starts of an unstable cell.
#[derive(Clone, Copy)]
struct Nearest {
    clean: u32,
    unclean: u32,
    start: Column,
}

impl Default for Nearest {
    fn default() -> Self {
        Nearest { clean: u32::MAX, unclean: u32::MAX, start: Column(0) }
    }
}

impl Nearest {
    fn clean(&mut self, distance: u32) {
        self.clean = self.clean.min(distance);
    }

    fn unclean(&mut self, start: Column, distance: u32) {
        if distance < self.unclean {
            (self.unclean, self.start) = (distance, start);
        }
    }

    /// The start whose way is not clean although no nearer start has a clean one.
    fn ambiguous(&self) -> Option<Column> {
        (self.unclean < u32::MAX && self.unclean <= self.clean).then_some(self.start)
    }
}

/// The columns that a burst from `start` must not pass: the row is left there, or an output contradicts the start.
fn blocked(table: &FlowTable, row: Row, start: Column, left: &ColumnSet) -> ColumnSet {
    let cells = table.row_cells(row);
    let held = cells[start.at()].outputs;
    let mut blocked = *left;
    for (column, cell) in table.columns().zip(cells) {
        if cell.outputs.conflicts(held) != 0 {
            blocked.insert(column);
        }
    }
    blocked
}

/// Fills in "stay, outputs hold". A stable cell in the middle of a burst may get an output in this way that its own
/// bursts must hold in turn, hence the repetition; each round gives at least one output of a stable cell a value.
fn fill_inner(table: &mut FlowTable, row: Row, stable: &ColumnSet, inner_of: &[(Column, ColumnSet)]) {
    let mut again = true;
    while again {
        again = false;
        for (start, inner) in inner_of {
            let held = table.cell(row, *start).outputs;
            for column in inner.iter() {
                let cell = table.cell_mut(row, column);
                let filled = cell.outputs.or(held);
                again |= filled != cell.outputs && stable.contains(column);
                cell.outputs = filled;
                cell.next = Some(row);
                cell.inner = true;
            }
        }
    }
}

fn report_ambiguous(
    table: &FlowTable,
    row: Row,
    start: Column,
    column: Column,
    blocked: &ColumnSet,
    report: &mut Report,
) {
    let name = table.name(row);
    report.error("ambiguous-burst", Spot::cell(name, column, table.inputs), || {
        let passed = start.between(column).filter(|&c| c != start && c != column);
        let at = passed.filter(|&c| blocked.contains(c)).min_by_key(|c| (c.distance(start), c.0)).unwrap_or(column);
        let why = if table.next(row, at).is_some_and(|next| next != row) {
            "where the row is left already"
        } else {
            "whose outputs differ from the start's"
        };
        format!(
            "Row {}: on the way from column {} to column {} the inputs may pass column {}, {why}, so the burst to {} is \
             ambiguous. Keep only one of the two cells, or split the row.",
            shown(name),
            table.column_text(start),
            table.column_text(column),
            table.column_text(at),
            table.column_text(column)
        )
    });
}

/// Two bursts of a row may pass one cell and want different outputs held there.
fn report_lost_hold(
    table: &FlowTable,
    row: Row,
    start: Column,
    inner: &ColumnSet,
    project: &Project,
    report: &mut Report,
) {
    let held = table.cell(row, start).outputs;
    for column in inner.iter() {
        let lost = table.cell(row, column).outputs.conflicts(held);
        if lost != 0 {
            let name = table.name(row);
            report.error("ambiguous-burst", Spot::cell(name, column, table.inputs), || {
                format!(
                    "Row {}: a burst that starts in column {} passes column {}, where {} cannot hold because another \
                     burst of the row needs the other value there. Split the row.",
                    shown(name),
                    table.column_text(start),
                    table.column_text(column),
                    outputs_in(lost, &project.outputs)
                )
            });
        }
    }
}
