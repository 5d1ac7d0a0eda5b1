//! From points to cubes: a compact list of cubes that holds given points and no other.
//!
//! Splitting on the highest variable, covering both halves and joining what they have in common. Not a smallest list (it
//! need not be), but disjoint, and the same for the same points. O(variables · points).

use std::cmp::Ordering;

use crate::logic::values::Cube;

/// Disjoint cubes over the variables of `mask` that together hold exactly `points` (ascending, without repeats, zero
/// outside `mask`).
pub(crate) fn gather(points: &[u32], mask: u32) -> Vec<Cube> {
    let bits: Vec<u32> = (0..32).filter(|b| mask >> b & 1 == 1).collect();
    let mut cubes = Vec::new();
    let mut spare = Vec::new();
    split(points, &bits, mask, &mut cubes, &mut spare);
    cubes
}

/// Appends the cubes of one half, ordered by [`order`].
fn split(points: &[u32], bits: &[u32], mask: u32, cubes: &mut Vec<Cube>, spare: &mut Vec<Cube>) {
    match points {
        [] => return,
        [only] => return cubes.push(Cube { care: mask, ones: only & mask }),
        _ => {}
    }
    let Some((&top, lower)) = bits.split_last() else {
        return cubes.push(Cube::default());
    };
    if points.len() == 1 << bits.len() {
        return cubes.push(Cube::default());
    }
    let bit = 1 << top;
    let cut = points.partition_point(|p| p & bit == 0);
    let start = cubes.len();
    split(&points[..cut], lower, mask & !bit, cubes, spare);
    let middle = cubes.len();
    split(&points[cut..], lower, mask & !bit, cubes, spare);
    join(cubes, start, middle, bit, spare);
}

/// Joins the cubes of the half without `bit` (`start..middle`) with those of the half with it.
fn join(cubes: &mut Vec<Cube>, start: usize, middle: usize, bit: u32, spare: &mut Vec<Cube>) {
    spare.clear();
    let (mut zero, mut one) = (start, middle);
    while zero < middle || one < cubes.len() {
        let next = match (cubes.get(zero).filter(|_| zero < middle), cubes.get(one)) {
            (Some(a), Some(b)) => order(*a, *b),
            (Some(_), None) => Ordering::Less,
            _ => Ordering::Greater,
        };
        spare.push(match next {
            Ordering::Equal => cubes[zero],
            Ordering::Less => Cube { care: cubes[zero].care | bit, ones: cubes[zero].ones },
            Ordering::Greater => Cube { care: cubes[one].care | bit, ones: cubes[one].ones | bit },
        });
        zero += usize::from(next != Ordering::Greater);
        one += usize::from(next != Ordering::Less);
    }
    cubes.truncate(start);
    cubes.append(spare);
}

/// Compares at the lowest variable in which the cubes differ: free, 0, 1.
fn order(a: Cube, b: Cube) -> Ordering {
    let differ = (a.care ^ b.care) | (a.ones ^ b.ones);
    if differ == 0 {
        return Ordering::Equal;
    }
    let at = differ & differ.wrapping_neg();
    let rank = |c: Cube| u8::from(c.care & at != 0) + u8::from(c.ones & at != 0);
    rank(a).cmp(&rank(b))
}

/// All points of a cube whose fixed variables lie in `mask`, ascending.
pub(crate) fn points_of(cube: Cube, mask: u32) -> impl Iterator<Item = u32> {
    let free = mask & !cube.care;
    let mut next = Some(0u32);
    std::iter::from_fn(move || {
        let sub = next?;
        next = (sub != free).then(|| sub.wrapping_sub(free) & free);
        Some(cube.ones | sub)
    })
}

/// The smallest cube that holds both.
pub(crate) fn join_of(a: Cube, b: Cube) -> Cube {
    let care = a.care & b.care & !(a.ones ^ b.ones);
    Cube { care, ones: a.ones & care }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn cubes_hold_exactly_the_points() {
        for mask in [0b1111u32, 0b1_0110] {
            let all: Vec<u32> = points_of(Cube::default(), mask).collect();
            for set in 0..1u32 << all.len() {
                let points: Vec<u32> =
                    all.iter().enumerate().filter(|(i, _)| set >> i & 1 == 1).map(|(_, &p)| p).collect();
                let cubes = gather(&points, mask);
                let mut held: Vec<u32> = cubes.iter().flat_map(|&c| points_of(c, mask)).collect();
                held.sort_unstable();
                assert_eq!(held, points);
            }
        }
    }

    #[test]
    fn a_full_space_is_one_cube() {
        let all: Vec<u32> = (0..64).collect();
        assert_eq!(gather(&all, 63), [Cube::default()]);
        assert_eq!(gather(&all[32..], 63), [Cube { care: 32, ones: 32 }]);
    }
}
