//! A stage's value, kept until its input changes.

/// The last value of a stage with the input that it came from. Inputs are compared by value.
#[derive(Debug)]
pub struct Kept<K, V>(Option<(K, V)>);

impl<K, V> Default for Kept<K, V> {
    fn default() -> Self {
        Kept(None)
    }
}

impl<K: PartialEq, V: Clone + PartialEq> Kept<K, V> {
    /// The value for `input`: the one that is kept, if the input is what it was, else what `make` returns. A new value that equals
    /// the old one is replaced by it, so that shared values stay shared and the next comparison is quick. `whole` is asked
    /// after `make`: a value that was cut short is returned, but not kept.
    pub fn get(&mut self, input: K, make: impl FnOnce(&K) -> V, whole: impl FnOnce() -> bool) -> V {
        if let Some((_, value)) = self.0.as_ref().filter(|(last, _)| *last == input) {
            return value.clone();
        }
        let mut value = make(&input);
        if let Some((_, old)) = self.0.take().filter(|(_, old)| *old == value) {
            value = old;
        }
        if whole() {
            self.0 = Some((input, value.clone()));
        }
        value
    }
}

#[cfg(test)]
mod tests {
    use std::cell::Cell;
    use std::sync::Arc;

    use super::*;

    #[test]
    fn runs_only_when_the_input_changes() {
        let runs = Cell::new(0);
        let mut kept: Kept<i32, Arc<i32>> = Kept::default();
        let mut get = |input: i32, whole: bool| {
            let half = |i: &i32| {
                runs.set(runs.get() + 1);
                Arc::new(i / 2)
            };
            kept.get(input, half, || whole)
        };
        let first = get(4, true);
        assert!(Arc::ptr_eq(&first, &get(4, true)));
        assert_eq!(runs.get(), 1);
        // Another input with an equal value: the very same value is handed on.
        assert!(Arc::ptr_eq(&first, &get(5, true)));
        assert_eq!(runs.get(), 2);
        get(8, false);
        get(8, true);
        assert_eq!(runs.get(), 4, "a value that was cut short is made again");
    }
}
