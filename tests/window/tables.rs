//! Tables of any size, as project files.

use std::fmt::Write as _;

/// `n` rows in a ring on one input: each rests in one column and leads to the next in the other. Nothing merges.
pub fn ring(n: usize) -> String {
    let mut text =
        String::from("(format: 1, title: \"Ring\", inputs: [\"a\", \"b\"], outputs: [\"q\", \"r\"],\n");
    let _ = writeln!(text, "initial: (\"s0\", \"00\"), rows: [");
    for i in 0..n {
        let columns = ["00", "01", "11", "10"];
        let (here, next) = (columns[i % 4], columns[(i + 1) % 4]);
        let outputs = format!("{}{}", i / 2 % 2, i / 3 % 2);
        let to = (i + 1) % n;
        let _ = writeln!(
            text,
            "(name: \"s{i}\", cells: {{\"{here}\": (\"s{i}\", \"{outputs}\"), \"{next}\": (\"s{to}\", \"--\")}}),"
        );
    }
    text.push_str("])\n");
    text
}
