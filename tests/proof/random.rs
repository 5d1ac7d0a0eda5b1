//! Random controllers as projects, the same for the same seed on every machine.

use std::collections::BTreeMap;

use stillgate::project::choices::Discipline;
use stillgate::project::{CellEntry, Project, RowEntry};

/// A generator of numbers (splitmix64).
pub struct Dice(pub u64);

impl Dice {
    pub fn roll(&mut self, sides: usize) -> usize {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ z >> 30).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ z >> 27).wrapping_mul(0x94d0_49bb_1331_11eb);
        ((z ^ z >> 31) % sides as u64) as usize
    }

    pub fn chance(&mut self, percent: usize) -> bool {
        self.roll(100) < percent
    }
}

/// A primitive table with one stable cell a row, in normal mode but for some chains, with open cells and some outputs
/// given in unstable cells.
pub fn controller(seed: u64, discipline: Discipline) -> Project {
    let mut dice = Dice(seed);
    let inputs = if discipline == Discipline::Burst { 2 + dice.roll(2) } else { 1 + dice.roll(3) };
    let outputs = 1 + dice.roll(2);
    let rows = 3 + dice.roll(6);
    let name = |c: char, i: usize| format!("{c}{}", i + 1);
    let mut project = Project::new(
        (0..inputs).map(|i| name('x', i)).collect(),
        (0..outputs).map(|j| name('z', j)).collect(),
    );
    project.discipline = discipline;
    let text = |c: usize| (0..inputs).map(|i| if c >> i & 1 == 1 { '1' } else { '0' }).collect::<String>();
    let stable: Vec<usize> = (0..rows)
        .map(|r| if r < 1 << inputs && dice.chance(50) { r } else { dice.roll(1 << inputs) })
        .collect();
    for r in 0..rows {
        let mut cells = BTreeMap::new();
        let value = |dice: &mut Dice, open: usize| {
            (0..outputs)
                .map(|_| if dice.chance(open) { '-' } else { ['0', '1'][dice.roll(2)] })
                .collect::<String>()
        };
        cells.insert(text(stable[r]), CellEntry { next: name('s', r), outputs: value(&mut dice, 4) });
        for column in (0..1 << inputs).filter(|&c| c != stable[r]) {
            let distance = (column ^ stable[r]).count_ones();
            let wanted = match discipline {
                Discipline::Single => distance == 1 && dice.chance(85),
                Discipline::Burst => dice.chance(if distance == 1 { 30 } else { 45 }),
            };
            let goals: Vec<usize> = (0..rows).filter(|&k| stable[k] == column).collect();
            if wanted && !goals.is_empty() {
                let goal = goals[dice.roll(goals.len())];
                let open = if dice.chance(12) { 50 } else { 100 };
                cells.insert(
                    text(column),
                    CellEntry { next: name('s', goal), outputs: value(&mut dice, open) },
                );
            }
        }
        project.rows.push(RowEntry { name: name('s', r), cells });
    }
    project.initial = Some((name('s', 0), text(stable[0])));
    project
}
