//! Plain values of the gates.

/// Cost of a design.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default)]
pub struct Cost {
    /// Literals of all products; a shared product counts once.
    pub literals: usize,
    /// Gates, inverters and storage elements included.
    pub gates: usize,
    /// Transistors, two for each gate input in static CMOS.
    pub transistors: usize,
    /// Gates on the longest way from an input or state variable to an excitation or output.
    pub levels: usize,
}
