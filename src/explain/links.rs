//! What belongs together: from one selected item to the items of every stage that it touches.
//!
//! Linear in the size of the design for one selection.

use std::collections::BTreeSet;

use crate::base::{Code, Column, Row};
use crate::codes::values::Coded;
use crate::design::values::{Design, Pick};
use crate::logic::values::{Equations, Transition, point};
use crate::merge::values::Reduced;

/// All items that `pick` touches in any view, itself included.
pub fn linked(design: &Design, pick: Pick) -> BTreeSet<Pick> {
    let mut links = Links { design, all: BTreeSet::from([pick]) };
    match pick {
        Pick::Row(row) => links.row(row),
        Pick::Cell(row, column) => links.cell(row, column),
        Pick::Pair(a, b) => {
            links.all.extend([Pick::Row(a), Pick::Row(b)]);
            if let Some(merged) = &design.merged
                && a != b
                && a.at().max(b.at()) < merged.pairs.rows
            {
                for ((p, q), column) in merged.pairs.implies(a, b) {
                    links.all.extend([Pick::Pair(p, q), Pick::Cell(a, column), Pick::Cell(b, column)]);
                }
            }
        }
        Pick::Compatible(i) => {
            if let Some(set) = design.merged.as_ref().and_then(|m| m.maximal.get(i)) {
                links.all.extend(set.ones().map(|r| Pick::Row(Row::new(r))));
            }
        }
        Pick::Merged(row) => links.merged(row),
        Pick::MergedCell(row, column) => links.merged_cell(row, column),
        Pick::Code(code) => {
            if let Some(row) = design.coded.as_ref().and_then(|c| c.row_of(code)) {
                links.merged(row);
            }
        }
        Pick::Entry(code, column) => links.entry(code, column),
        Pick::Move(i) => links.moved(i),
        Pick::Function(_) => {}
        Pick::Product(f, p) => links.product(f, p),
        Pick::Point(_, at) => {
            if let Some(e) = &design.equations {
                let column = Column((at & ((1 << e.inputs) - 1)) as u16);
                links.entry(Code(at >> e.inputs), column);
            }
        }
    }
    links.all
}

struct Links<'a> {
    design: &'a Design,
    all: BTreeSet<Pick>,
}

impl Links<'_> {
    fn reduced(&self) -> Option<&Reduced> {
        self.design.merged.as_ref()?.reduced.as_ref()
    }

    fn coded(&self) -> Option<&Coded> {
        self.design.coded.as_deref()
    }

    fn homes(&self, row: Row) -> Vec<Row> {
        let homes = |r: &Reduced| r.table.rows().filter(|s| r.members[s.at()].contains(&row)).collect();
        self.reduced().map(homes).unwrap_or_default()
    }

    fn codes(&self, row: Row) -> Vec<Code> {
        self.coded().and_then(|c| c.codes.get(row.at()).cloned()).unwrap_or_default()
    }

    fn row(&mut self, row: Row) {
        for home in self.homes(row) {
            self.all.insert(Pick::Merged(home));
            let codes = self.codes(home);
            self.all.extend(codes.into_iter().map(Pick::Code));
        }
    }

    fn cell(&mut self, row: Row, column: Column) {
        self.all.insert(Pick::Row(row));
        for home in self.homes(row) {
            self.all.insert(Pick::MergedCell(home, column));
            self.entries_of(home, column);
            self.moves_into(home, column);
        }
    }

    fn entries_of(&mut self, row: Row, column: Column) {
        let codes = self.codes(row);
        self.all.extend(codes.iter().map(|&c| Pick::Entry(c, column)));
        self.points(&codes, column);
    }

    fn points(&mut self, codes: &[Code], column: Column) {
        if let Some(e) = &self.design.equations {
            for f in 0..e.functions.len() {
                self.all.extend(codes.iter().map(|&c| Pick::Point(f, point(column, c, e.inputs))));
            }
        }
    }

    fn moves_into(&mut self, row: Row, column: Column) {
        let found: Vec<Pick> = match self.reduced() {
            None => Vec::new(),
            Some(r) => {
                let through =
                    r.moves.iter().enumerate().filter(|(_, m)| m.from.row == row && m.column == column);
                through.map(|(i, _)| Pick::Move(i)).collect()
            }
        };
        self.all.extend(found);
    }

    fn merged(&mut self, row: Row) {
        self.all.insert(Pick::Merged(row));
        let members = self.reduced().and_then(|r| r.members.get(row.at()).cloned()).unwrap_or_default();
        self.all.extend(members.into_iter().map(Pick::Row));
        let codes = self.codes(row);
        self.all.extend(codes.into_iter().map(Pick::Code));
    }

    fn merged_cell(&mut self, row: Row, column: Column) {
        self.all.extend([Pick::Merged(row), Pick::MergedCell(row, column)]);
        let members = self.reduced().and_then(|r| r.members.get(row.at()).cloned()).unwrap_or_default();
        self.all.extend(members.into_iter().map(|r| Pick::Cell(r, column)));
        self.entries_of(row, column);
        self.moves_into(row, column);
    }

    fn entry(&mut self, code: Code, column: Column) {
        self.all.extend([Pick::Entry(code, column), Pick::Code(code)]);
        self.points(&[code], column);
        if let Some(row) = self.coded().and_then(|c| c.row_of(code)) {
            self.merged_cell(row, column);
        }
    }

    fn moved(&mut self, index: usize) {
        let Some(m) = self.reduced().and_then(|r| r.moves.get(index).copied()) else { return };
        self.all.insert(Pick::Move(index));
        let members = self.reduced().map(|r| r.members[m.from.row.at()].clone()).unwrap_or_default();
        self.all.extend(members.into_iter().map(|r| Pick::Cell(r, m.column)));
        let ends = [(m.from.row, m.from.column), (m.from.row, m.column), (m.to, m.column)];
        for (row, column) in ends {
            self.all.insert(Pick::MergedCell(row, column));
            self.entries_of(row, column);
        }
        let passed: Vec<Code> = match self.coded() {
            None => Vec::new(),
            Some(c) => {
                let ways = c.ways.iter().filter(|w| w.from == m.from.row && w.column == m.column);
                ways.flat_map(|w| w.path.iter().copied()).collect()
            }
        };
        self.all.extend(passed.iter().map(|&c| Pick::Entry(c, m.column)));
    }

    fn product(&mut self, f: usize, p: usize) {
        self.all.insert(Pick::Function(f));
        let Some(e) = self.design.equations.clone() else { return };
        let Some((function, product)) = e.functions.get(f).and_then(|x| Some((x, x.products.get(p)?))) else {
            return;
        };
        for &required in &product.alone {
            for &t in &function.required[required].why {
                self.transition(&e, f, &function.transitions[t]);
            }
        }
    }

    fn transition(&mut self, e: &Equations, f: usize, t: &Transition) {
        self.all.insert(Pick::Move(t.cause));
        for at in [t.start, t.end] {
            let column = Column((at & ((1 << e.inputs) - 1)) as u16);
            let code = Code(at >> e.inputs);
            self.all.extend([Pick::Point(f, at), Pick::Entry(code, column)]);
            if let Some(row) = self.coded().and_then(|c| c.row_of(code)) {
                self.all.insert(Pick::MergedCell(row, column));
            }
        }
    }
}
