//! A cell as text: what is shown in the table, typed into it, and exchanged with a spreadsheet.
//!
//! `dry 0-` is a next row and outputs; `dry` alone keeps the outputs, `0-` alone keeps the next row, nothing or `-` makes the cell
//! unspecified; `. 01` or `= 01` stands for "stay" with outputs 01.

use crate::project::CellEntry;

/// The text of a cell; empty if it is unspecified.
pub fn show(cell: Option<&CellEntry>) -> String {
    match cell {
        None => String::new(),
        Some(c) if c.outputs.is_empty() => c.next.clone(),
        Some(c) => format!("{} {}", c.next, c.outputs),
    }
}

/// Reads what was typed into the cell of `row` that held `before`. `Ok(None)`: unspecified.
///
/// # Errors
/// A sentence that says what was expected.
pub fn parse(
    text: &str,
    row: &str,
    before: Option<&CellEntry>,
    outputs: usize,
) -> Result<Option<CellEntry>, String> {
    let words: Vec<&str> = text.split_whitespace().collect();
    let open = "-".repeat(outputs);
    let held = before.map_or(open.as_str(), |c| c.outputs.as_str());
    let is_outputs = |w: &str| w.len() == outputs && outputs > 0 && w.bytes().all(|b| b"01-".contains(&b));
    let next = |w: &str| if w == "." || w == "=" { row.to_owned() } else { w.to_owned() };
    match words.as_slice() {
        [] | ["-"] => Ok(None),
        [w] if is_outputs(w) => {
            let next = before.map_or_else(|| "-".to_owned(), |c| c.next.clone());
            Ok(Some(CellEntry { next, outputs: (*w).to_owned() }))
        }
        [w] if w.bytes().all(|b| b"01-".contains(&b)) => Err(format!(
            "{w} has {} characters; give one of 0, 1 or - for each of the {outputs} outputs.",
            w.len()
        )),
        [w] => Ok(Some(CellEntry { next: next(w), outputs: held.to_owned() })),
        [w, o] if is_outputs(o) => Ok(Some(CellEntry { next: next(w), outputs: (*o).to_owned() })),
        [_, o] => {
            Err(format!("{o} is no output word; give one of 0, 1 or - for each of the {outputs} outputs."))
        }
        _ => Err("A cell holds a next row and outputs, with one space between.".to_owned()),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn cell(next: &str, outputs: &str) -> Option<CellEntry> {
        Some(CellEntry { next: next.into(), outputs: outputs.into() })
    }

    #[test]
    fn typed_text_sets_what_it_names_and_keeps_the_rest() {
        let before = cell("dry", "01");
        let read = |text| parse(text, "wet", before.as_ref(), 2);
        assert_eq!(read("full 1-"), Ok(cell("full", "1-")));
        assert_eq!(read("full"), Ok(cell("full", "01")));
        assert_eq!(read("1-"), Ok(cell("dry", "1-")));
        assert_eq!(read(". 11"), Ok(cell("wet", "11")));
        assert_eq!(read(" "), Ok(None));
        assert!(read("full 1").is_err() && read("101").is_err() && read("a b c").is_err());
        assert_eq!(parse("0", "wet", None, 1), Ok(cell("-", "0")));
    }

    #[test]
    fn shown_text_reads_back() {
        for c in [cell("dry", "0-"), cell("-", "01"), None] {
            assert_eq!(parse(&show(c.as_ref()), "wet", None, 2), Ok(c));
        }
    }
}
