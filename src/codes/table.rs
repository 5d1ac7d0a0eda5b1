//! From codes and ways to the finished assignment: spare codes named, ways in order, and the encoded table.
//!
//! The encoded table says for every code and column what comes next: the rows' own stable cells, the codes on ways, and
//! in a move of several bits at once every code that the bits may pass in any order. Where a code by hand asks two
//! things of one point the first stands (stable cells, then starts of ways, then what lies on the way); the race check
//! sees what comes of it.
//!
//! Cost: the number of specified entries times its logarithm.

use std::collections::BTreeMap;

use crate::base::{Bound, Code, Column, Row};
use crate::codes::values::{Coded, Encoded, Entry, Role, Spare, Step, Way};
use crate::merge::values::Reduced;
use crate::project::choices::Method;

/// What a method has decided.
pub(super) struct Draft {
    /// The method.
    pub method: Method,
    /// Number of state variables.
    pub bits: usize,
    /// Codes of each row, the one for power-up first.
    pub codes: Vec<Vec<Code>>,
    /// A way for each unstable specified cell and each code of its row, in any order.
    pub ways: Vec<Way>,
    /// What is known of the number of bits.
    pub bound: Bound,
    /// What is known of the number of spare codes and of the longest way.
    pub tidy: Bound,
}

/// Completes a draft.
pub(super) fn finish(reduced: &Reduced, draft: Draft) -> Coded {
    let Draft { method, bits, codes, mut ways, bound, tidy } = draft;
    ways.sort_by_key(|way| (way.from, way.column, way.path[0]));
    let owner: BTreeMap<Code, Row> = codes
        .iter()
        .enumerate()
        .flat_map(|(r, own)| own.iter().map(move |&code| (code, Row::new(r))))
        .collect();
    let encoded = encode(reduced, bits, &owner, &ways);
    let initial = codes[reduced.initial.row.at()][0];
    let longest_path = ways.iter().map(|way| way.path.len() - 1).max().unwrap_or(0);
    Coded {
        method,
        bits,
        spare: spare(&owner, &ways),
        codes,
        ways,
        encoded,
        initial,
        bound,
        longest_path,
        tidy,
    }
}

/// Turns codes so that `home` gets code 0, and puts the bits in the order in which the codes first use them.
pub(super) fn normalise(codes: &mut [Code], home: usize, bits: usize) {
    let base = codes[home].0;
    let column = |bit: usize| -> Vec<bool> {
        // `false` sorts first: a bit that an early code sets comes early.
        codes.iter().map(|code| (code.0 ^ base) >> bit & 1 == 0).collect()
    };
    let mut order: Vec<usize> = (0..bits).collect();
    order.sort_by_cached_key(|&bit| column(bit));
    for code in codes.iter_mut() {
        let old = code.0 ^ base;
        code.0 = order.iter().enumerate().fold(0, |new, (to, &from)| new | (old >> from & 1) << to);
    }
}

/// All codes of the subcube spanned by two codes.
pub(super) fn span(a: Code, b: Code) -> impl Iterator<Item = Code> {
    let free = a.0 ^ b.0;
    let mut next = Some(0u32);
    std::iter::from_fn(move || {
        let sub = next?;
        next = if sub == free { None } else { Some(sub.wrapping_sub(free) & free) };
        Some(Code(a.0 ^ sub))
    })
}

fn spare(owner: &BTreeMap<Code, Row>, ways: &[Way]) -> Vec<Spare> {
    let mut passed: Vec<Code> = ways
        .iter()
        .filter(|way| way.step == Step::OneBit)
        .flat_map(|way| way.path.iter().copied())
        .filter(|code| !owner.contains_key(code))
        .collect();
    passed.sort_unstable();
    passed.dedup();
    passed.iter().enumerate().map(|(i, &code)| Spare { name: format!("P{}", i + 1), code }).collect()
}

fn encode(reduced: &Reduced, bits: usize, owner: &BTreeMap<Code, Row>, ways: &[Way]) -> Encoded {
    let table = &reduced.table;
    let mut list: Vec<((Code, Column), Entry)> = Vec::new();
    for (&code, &row) in owner {
        for column in table.columns().filter(|&column| table.stable(row, column)) {
            list.push(((code, column), Entry { next: code, goal: row, role: Role::Row(row) }));
        }
    }
    let entry = |code: Code, next: Code, way: &Way, stranger: Role| {
        let role = match owner.get(&code) {
            Some(&row) if table.next(row, way.column).is_some() => Role::Row(row),
            Some(&row) => Role::Lent(row),
            None => stranger,
        };
        ((code, way.column), Entry { next, goal: way.to, role })
    };
    for way in ways {
        list.push(entry(way.path[0], way.path[1], way, Role::Spare));
    }
    for way in ways {
        match way.step {
            Step::OneBit => {
                list.extend(
                    way.path.windows(2).skip(1).map(|step| entry(step[0], step[1], way, Role::Spare)),
                );
            }
            Step::Together => {
                let (a, b) = (way.path[0], way.path[1]);
                let inner = span(a, b).filter(|&code| code != a && code != b);
                list.extend(inner.map(|code| entry(code, b, way, Role::OnTheWay)));
            }
        }
    }
    // The first that speaks for a point stands: the sort is stable.
    list.sort_by_key(|&(at, _)| at);
    list.dedup_by_key(|&mut (at, _)| at);
    Encoded { bits, inputs: table.inputs, entries: list.into_iter().collect() }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn normal_codes_start_at_zero_and_use_bits_in_order() {
        let mut codes = [Code(0b110), Code(0b010), Code(0b111)];
        normalise(&mut codes, 0, 3);
        assert_eq!(codes, [Code(0), Code(1), Code(2)]);
    }

    #[test]
    fn a_span_holds_each_code_once() {
        let mut seen: Vec<u32> = span(Code(0b1001), Code(0b0011)).map(|code| code.0).collect();
        seen.sort_unstable();
        assert_eq!(seen, [0b0001, 0b0011, 0b1001, 0b1011]);
    }
}
