//! Where a code can settle under fixed inputs, for every order in which excited bits change.
//!
//! The general multiple-winner model: of the excited bits any non-empty subset may change next. Exact. The states
//! reached are closed over, not the ways, so the cost is that of the edges between them; where all codes of the subcube
//! of a many-bit step head for the same code, that subcube costs one look at each of its codes and no subsets.
//! J. A. Brzozowski, M. Yoeli: Practical approach to asynchronous gate networks, 1976.

use std::collections::{BTreeMap, VecDeque};

/// Codes that one start may reach before the check gives up on it. A sound design reaches a handful.
const MOST: usize = 1 << 12;

/// What can happen from one code.
#[derive(Debug, Default)]
pub(super) struct Settled {
    /// Unstable codes reached, each with its next code; the start first. Of a subcube in which everything heads for
    /// one code only the corner where it is entered is listed.
    pub steps: Vec<(u32, u32)>,
    /// Stable codes reached.
    pub ends: Vec<u32>,
    /// Codes of a way that comes back to a code it has passed, that code last.
    pub cycle: Option<Vec<u32>>,
    /// Codes of a way whose last code has no next code.
    pub stray: Option<Vec<u32>>,
    /// More than [`MOST`] codes were reached, and the rest left out.
    pub lost: bool,
}

impl Settled {
    /// Whether every order ends, in specified codes.
    pub fn sound(&self) -> bool {
        self.cycle.is_none() && self.stray.is_none() && !self.lost
    }
}

/// A code on the way that is being followed.
struct Frame {
    code: u32,
    excited: u32,
    /// The next subset of `excited` to change; 0 when all were tried.
    subset: u32,
    /// Everything between this code and its next code heads for that next code.
    straight: bool,
}

/// Follows every order of changes from `start`. `next` gives the next code, or `None` where it is unspecified.
pub(super) fn settle(start: u32, next: impl Fn(u32) -> Option<u32>) -> Settled {
    let mut found = Settled::default();
    let mut seen: Vec<(u32, bool)> = Vec::new();
    let mut way: Vec<Frame> = Vec::new();
    enter(start, &next, &mut found, &mut seen, &mut way);
    while let Some(frame) = way.last_mut() {
        if frame.subset == 0 {
            let code = frame.code;
            way.pop();
            if let Some(entry) = seen.iter_mut().find(|(c, _)| *c == code) {
                entry.1 = false;
            }
            continue;
        }
        let code = frame.code ^ frame.subset;
        frame.subset = if frame.straight { 0 } else { (frame.subset - 1) & frame.excited };
        match seen.iter().find(|(c, _)| *c == code) {
            Some((_, false)) => {}
            Some((_, true)) => {
                if found.cycle.is_none() {
                    found.cycle = Some(way.iter().map(|f| f.code).chain([code]).collect());
                }
            }
            None if seen.len() == MOST => {
                found.lost = true;
                return found;
            }
            None => enter(code, &next, &mut found, &mut seen, &mut way),
        }
    }
    found
}

/// Notes what the code does, and puts it on the way if it is unstable.
fn enter(
    code: u32,
    next: &impl Fn(u32) -> Option<u32>,
    found: &mut Settled,
    seen: &mut Vec<(u32, bool)>,
    way: &mut Vec<Frame>,
) {
    match next(code) {
        None => {
            seen.push((code, false));
            if found.stray.is_none() {
                found.stray = Some(way.iter().map(|f| f.code).chain([code]).collect());
            }
        }
        Some(goal) if goal == code => {
            seen.push((code, false));
            found.ends.push(code);
        }
        Some(goal) => {
            seen.push((code, true));
            found.steps.push((code, goal));
            let excited = code ^ goal;
            way.push(Frame { code, excited, subset: excited, straight: straight(code, goal, next) });
        }
    }
}

/// Whether every code between `code` and `goal` heads for `goal`, so that each order of the excited bits ends there.
fn straight(code: u32, goal: u32, next: &impl Fn(u32) -> Option<u32>) -> bool {
    let excited = code ^ goal;
    let mut subset = (excited - 1) & excited;
    while subset != 0 {
        if next(code ^ subset) != Some(goal) {
            return false;
        }
        subset = (subset - 1) & excited;
    }
    true
}

/// A shortest way from `start` to the stable code `end`, both included. For messages: it is only called on failures.
pub(super) fn way_to(start: u32, end: u32, next: impl Fn(u32) -> Option<u32>) -> Vec<u32> {
    let mut before: BTreeMap<u32, u32> = BTreeMap::from([(start, start)]);
    let mut queue = VecDeque::from([start]);
    while let Some(code) = queue.pop_front() {
        if code == end || before.len() > MOST {
            break;
        }
        let Some(goal) = next(code) else { continue };
        let excited = code ^ goal;
        let mut subset = excited;
        while subset != 0 {
            let reached = code ^ subset;
            before.entry(reached).or_insert_with(|| {
                queue.push_back(reached);
                code
            });
            subset = (subset - 1) & excited;
        }
    }
    let mut way = vec![end];
    let mut at = end;
    while at != start {
        at = before.get(&at).copied().unwrap_or(start);
        way.push(at);
    }
    way.reverse();
    way
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_straight_subcube_has_one_step_and_one_end() {
        let found = settle(0, |_| Some(0b1_1111));
        assert_eq!(found.steps, [(0, 31)]);
        assert_eq!(found.ends, [31]);
        assert!(found.sound());
    }

    #[test]
    fn a_race_with_two_winners_shows_both_ends() {
        // 00 wants 11, but rests at 01 and at 10 too.
        let next = |code| Some(if code == 0 { 3 } else { code });
        let mut found = settle(0, next);
        found.ends.sort_unstable();
        assert_eq!(found.ends, [1, 2, 3]);
        assert_eq!(way_to(0, 2, next), [0, 2]);
    }

    #[test]
    fn cycles_and_strays_come_with_their_way() {
        let round = settle(0, |code| Some([1, 3, 0, 2][code as usize]));
        assert_eq!(round.cycle, Some(vec![0, 1, 3, 2, 0]));
        let stray = settle(0, |code| [Some(1), Some(3), None, None][code as usize]);
        assert_eq!(stray.stray, Some(vec![0, 1, 3]));
        assert!(stray.ends.is_empty());
    }
}
