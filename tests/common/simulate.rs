//! A plain simulation of finished functions: inputs change in any order, state variables follow one by one, chance decides.
//!
//! It knows the primitive table and the functions, and nothing of merged rows, codes or ways.

use std::collections::BTreeMap;

use stillgate::base::TotalState;
use stillgate::design::Design;
use stillgate::logic::values::{Equations, Target};

use crate::common::random::Rng;

/// Walks at random through the primitive table for `moves` input changes and follows the functions beside it.
///
/// Panics where the state moves before the last input has changed, does not settle, or settles with other outputs than
/// the table's. Returns how many input changes were followed.
pub fn walk(design: &Design, seed: u64, moves: usize) -> usize {
    let (Some(spec), Some(coded), Some(equations)) = (&design.spec, &design.coded, &design.equations) else {
        panic!("nothing to simulate");
    };
    let mut leaving: BTreeMap<TotalState, Vec<_>> = BTreeMap::new();
    for m in &spec.moves {
        leaving.entry(m.from).or_default().push(*m);
    }
    let rng = &mut Rng::new(seed);
    let (mut at, mut code) = (spec.initial, coded.initial.0);
    let mut followed = 0;
    for _ in 0..moves {
        let Some(ways) = leaving.get(&at) else { break };
        let way = *rng.pick(ways);
        let mut column = at.column.0;
        let mut changing: Vec<u16> = (0..spec.table.inputs)
            .map(|i| 1 << i)
            .filter(|b| (at.column.0 ^ way.column.0) & b != 0)
            .collect();
        while !changing.is_empty() {
            assert_eq!(excited(equations, column, code), 0, "the state moves in the middle of a burst");
            column ^= changing.swap_remove(rng.below(changing.len()));
        }
        let mut steps = 0;
        loop {
            let bits: Vec<u32> = (0..coded.bits)
                .map(|i| 1 << i)
                .filter(|b| excited(equations, column, code) & b != 0)
                .collect();
            if bits.is_empty() {
                break;
            }
            code ^= *rng.pick(&bits);
            steps += 1;
            assert!(steps <= 1 << coded.bits, "does not settle in {column:b}");
        }
        at = TotalState { row: way.to, column: way.column };
        let point = u32::from(column) | code << equations.inputs;
        for j in 0..spec.table.outputs {
            let wanted = spec.table.cell(at.row, at.column).outputs.get(j);
            let found = equations.functions.iter().find(|f| f.target == Target::Output(j));
            if let (Some(wanted), Some(function)) = (wanted, found) {
                assert_eq!(
                    function.value(equations.shape, point),
                    wanted,
                    "output {} in {} {}",
                    function.name,
                    spec.table.name(at.row),
                    spec.table.column_text(at.column)
                );
            }
        }
        followed += 1;
    }
    followed
}

/// The state variables that want to change, as a mask.
fn excited(equations: &Equations, column: u16, code: u32) -> u32 {
    let point = u32::from(column) | code << equations.inputs;
    let mut mask = 0;
    for function in &equations.functions {
        let value = function.value(equations.shape, point);
        match function.target {
            Target::Next(i) if value != (code >> i & 1 == 1) => mask |= 1 << i,
            Target::Set(i) if value && code >> i & 1 == 0 => mask |= 1 << i,
            Target::Reset(i) if value && code >> i & 1 == 1 => mask |= 1 << i,
            _ => {}
        }
    }
    mask
}
