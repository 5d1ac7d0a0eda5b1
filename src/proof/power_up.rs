//! Power-up: from which total states may the circuit not come to rest in a code that is in use?
//!
//! For each column the graph of codes, an edge for each subset of excited bits that may change next, is cut into
//! strongly connected components (R. E. Tarjan, 1972). A component of several codes is an oscillation unless some bit
//! stays excited at one value all through it: such a bit changes after a while, and the circuit leaves (J. A.
//! Brzozowski, C.-J. Seger, Asynchronous Circuits, 1995, transient cycles). A stable code that no row uses is a trap. A total
//! state is trapped if any order of changes leads to one of the two.
//!
//! Exact and linear in the edges, up to [`EDGES`] of them. Beyond that a code has only the edges to its next code (all
//! excited bits together) and those of one bit: traps found are real, and all stable ones are found, but an oscillation
//! that needs two of three bits to change together is missed. Beyond [`DENSE`] variables only codes
//! at most two bits from a code in use are tried, with all bits changing together.

use crate::base::{Code, Column};
use crate::codes::values::Coded;
use crate::proof::circuit::{Circuit, DENSE};
use crate::proof::report::Report;
use crate::proof::values::Trap;

/// Most edges for which every subset of excited bits is tried.
const EDGES: u64 = 1 << 22;

/// Most codes named of one oscillation.
const NAMED: usize = 64;

/// Tries the total states and lists the traps.
pub(super) fn power_up(circuit: &Circuit, coded: &Coded, report: &mut Report) {
    if circuit.variables() > DENSE {
        near_codes_in_use(circuit, coded, report);
        return;
    }
    let points = 1u32 << circuit.variables();
    let edges: u64 = (0..points).map(|p| 1u64 << (circuit.code(p) ^ circuit.next(p)).count_ones()).sum();
    let exact = edges <= EDGES;
    let mut used = vec![false; 1 << circuit.bits];
    for code in coded.codes.iter().flatten() {
        used[code.0 as usize] = true;
    }
    report.proof.power_up_exact = exact;
    report.proof.power_up_states = points as usize;
    let mut search = Search::new(circuit, &used, exact);
    for column in 0..1u32 << circuit.inputs {
        search.column(column);
        for code in 0..1u32 << circuit.bits {
            let Some(end) = search.bad[code as usize].checked_sub(1) else { continue };
            report.trap(|| {
                let (oscillates, codes) = search.ends[end as usize].clone();
                Trap { code: Code(code), column: Column(column as u16), oscillates, codes }
            });
        }
    }
}

/// A code whose successors are being visited.
struct Frame {
    code: u32,
    excited: u32,
    /// Subsets still to be tried; see [`Search::successor`].
    cursor: u32,
}

/// Mark in a cursor: the step of all excited bits together is still to be tried.
const TOGETHER: u32 = 1 << 31;

/// Tarjan's search in the codes of one column.
struct Search<'a> {
    circuit: &'a Circuit<'a>,
    used: &'a [bool],
    exact: bool,
    column: u32,
    /// Order in which a code was met, from 1; 0 is not yet.
    index: Vec<u32>,
    low: Vec<u32>,
    open: Vec<bool>,
    /// 1 + the number in `ends` of a bad end that this code can reach; 0 is none.
    bad: Vec<u32>,
    /// Bad ends: whether it goes round, and its codes.
    ends: Vec<(bool, Vec<Code>)>,
    stack: Vec<u32>,
    met: u32,
}

impl<'a> Search<'a> {
    fn new(circuit: &'a Circuit<'a>, used: &'a [bool], exact: bool) -> Self {
        let codes = used.len();
        Search {
            circuit,
            used,
            exact,
            column: 0,
            index: vec![0; codes],
            low: vec![0; codes],
            open: vec![false; codes],
            bad: vec![0; codes],
            ends: Vec::new(),
            stack: Vec::new(),
            met: 0,
        }
    }

    fn next(&self, code: u32) -> u32 {
        self.circuit.next(self.circuit.point(self.column, code))
    }

    fn column(&mut self, column: u32) {
        self.column = column;
        self.index.fill(0);
        self.bad.fill(0);
        self.ends.clear();
        self.met = 0;
        let mut way = Vec::new();
        for code in 0..self.used.len() as u32 {
            if self.index[code as usize] == 0 {
                way.push(self.enter(code));
                self.visit(&mut way);
            }
        }
    }

    fn enter(&mut self, code: u32) -> Frame {
        self.met += 1;
        self.index[code as usize] = self.met;
        self.low[code as usize] = self.met;
        self.open[code as usize] = true;
        self.stack.push(code);
        let excited = code ^ self.next(code);
        let cursor = if self.exact || excited == 0 { excited } else { excited | TOGETHER };
        Frame { code, excited, cursor }
    }

    fn visit(&mut self, way: &mut Vec<Frame>) {
        while let Some(frame) = way.last_mut() {
            let from = frame.code as usize;
            if let Some(subset) = successor(frame, self.exact) {
                let to = (frame.code ^ subset) as usize;
                if self.index[to] == 0 {
                    let entered = self.enter(to as u32);
                    way.push(entered);
                } else if self.open[to] {
                    self.low[from] = self.low[from].min(self.index[to]);
                } else if self.bad[from] == 0 {
                    self.bad[from] = self.bad[to];
                }
                continue;
            }
            if self.low[from] == self.index[from] {
                self.close(from as u32);
            }
            way.pop();
            if let Some(before) = way.last() {
                let before = before.code as usize;
                self.low[before] = self.low[before].min(self.low[from]);
                if self.bad[before] == 0 {
                    self.bad[before] = self.bad[from];
                }
            }
        }
    }

    /// A component is complete: everything on the stack from `root` on.
    fn close(&mut self, root: u32) {
        let first = self.stack.iter().rposition(|&c| c == root).unwrap_or(0);
        let codes = self.stack.split_off(first);
        let mut bad = codes.iter().map(|&c| self.bad[c as usize]).find(|&b| b != 0).unwrap_or(0);
        let stable = codes.len() == 1 && self.next(root) == root;
        let trap = if stable { !self.used[root as usize] } else { codes.len() > 1 && self.lasting(&codes) };
        if trap {
            self.ends.push((!stable, codes.iter().take(NAMED).map(|&c| Code(c)).collect()));
            bad = self.ends.len() as u32;
        }
        for &code in &codes {
            self.open[code as usize] = false;
            self.bad[code as usize] = bad;
        }
    }

    /// Whether the circuit may stay in these codes for ever: no bit is excited at the same value in all of them.
    fn lasting(&self, codes: &[u32]) -> bool {
        let always = codes.iter().fold(u32::MAX, |m, &c| m & (c ^ self.next(c)));
        let changing = codes.iter().fold(0, |m, &c| m | (c ^ codes[0]));
        always & !changing == 0
    }
}

/// The next set of bits to change: every subset if `exact`, else all together and then one at a time.
fn successor(frame: &mut Frame, exact: bool) -> Option<u32> {
    let cursor = frame.cursor;
    if cursor == 0 {
        return None;
    }
    if exact {
        frame.cursor = (cursor - 1) & frame.excited;
        return Some(cursor);
    }
    if cursor & TOGETHER != 0 {
        frame.cursor = if frame.excited.is_power_of_two() { 0 } else { frame.excited };
        return Some(frame.excited);
    }
    let bit = cursor & cursor.wrapping_neg();
    frame.cursor = cursor ^ bit;
    Some(bit)
}

/// Codes in use and those one or two bits away, all excited bits changing together.
fn near_codes_in_use(circuit: &Circuit, coded: &Coded, report: &mut Report) {
    let used: std::collections::BTreeSet<u32> = coded.codes.iter().flatten().map(|c| c.0).collect();
    let mut tried = used.clone();
    for &code in &used {
        for i in 0..circuit.bits {
            for j in 0..=i {
                tried.insert(code ^ (1 << i | 1 << j));
                tried.insert(code ^ 1 << i);
            }
        }
    }
    for column in 0..1u32 << circuit.inputs {
        for &start in &tried {
            report.proof.power_up_states += 1;
            let mut way = vec![start];
            let mut code = start;
            let trap = loop {
                let next = circuit.next(circuit.point(column, code));
                if next == code {
                    break (!used.contains(&code)).then(|| (false, vec![Code(code)]));
                }
                if let Some(at) = way.iter().position(|&c| c == next) {
                    break Some((true, way[at..].iter().take(NAMED).map(|&c| Code(c)).collect()));
                }
                way.push(next);
                code = next;
            };
            if let Some((oscillates, codes)) = trap {
                report.trap(|| Trap { code: Code(start), column: Column(column as u16), oscillates, codes });
            }
        }
    }
}
