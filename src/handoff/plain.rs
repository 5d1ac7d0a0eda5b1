//! Text on a terminal: user text made harmless, columns that line up, lines that are broken at blanks.
//!
//! A title or a name may hold anything that a file can hold. Nothing of it may break a line, move the cursor, or turn
//! the direction of writing, so everything that the user typed passes [`plain`] on its way out.

/// Widest line that the writers aim at, in characters.
pub const WIDTH: usize = 110;

/// The text on one line: control characters, line and paragraph separators, and marks that turn the direction of
/// writing are written as escapes (`\n`, `\u{202e}`). Everything else stands as it is.
pub fn plain(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        if c.is_control() || unseen(c) {
            out.extend(c.escape_default());
        } else {
            out.push(c);
        }
    }
    out
}

/// Characters of format that a reader cannot see.
fn unseen(c: char) -> bool {
    matches!(c, '\u{ad}' | '\u{61c}' | '\u{200b}'..='\u{200f}' | '\u{2028}'..='\u{202e}' | '\u{2060}'..='\u{206f}'
        | '\u{feff}' | '\u{fff9}'..='\u{fffb}' | '\u{e0000}'..='\u{e007f}')
}

/// Breaks text at blanks into lines of at most [`WIDTH`] characters: the first begins with `first`, the others with
/// `rest`. A word that is wider stands alone on its line.
pub fn wrap(first: &str, rest: &str, text: &str) -> Vec<String> {
    let mut lines = Vec::new();
    let mut line = first.to_owned();
    let mut width = line.chars().count();
    let mut empty = true;
    for word in text.split(' ').filter(|w| !w.is_empty()) {
        let length = word.chars().count();
        if !empty && width + 1 + length > WIDTH {
            lines.push(std::mem::replace(&mut line, rest.to_owned()));
            width = line.chars().count();
            empty = true;
        }
        if !empty {
            line.push(' ');
            width += 1;
        }
        line.push_str(word);
        width += length;
        empty = false;
    }
    lines.push(line.trim_end().to_owned());
    lines
}

/// Rows of cells with every column as wide as its widest cell, two blanks between, no blanks at the end of a line.
/// A column whose number is in `right` is set to the right.
pub fn align(rows: &[Vec<String>], indent: &str, right: &[usize]) -> Vec<String> {
    let columns = rows.iter().map(Vec::len).max().unwrap_or(0);
    let mut widths = vec![0; columns];
    for row in rows {
        for (width, cell) in widths.iter_mut().zip(row) {
            *width = (*width).max(cell.chars().count());
        }
    }
    rows.iter()
        .map(|row| {
            let mut line = indent.to_owned();
            for (i, cell) in row.iter().enumerate() {
                let pad = widths[i] - cell.chars().count();
                if i > 0 {
                    line.push_str("  ");
                }
                if right.contains(&i) {
                    line.extend(std::iter::repeat_n(' ', pad));
                    line.push_str(cell);
                } else {
                    line.push_str(cell);
                    line.extend(std::iter::repeat_n(' ', pad));
                }
            }
            line.trim_end().to_owned()
        })
        .collect()
}

/// A table whose first column names the rows, in as many blocks side by side as fit into [`WIDTH`]; `heads` has one entry for each
/// column, the first column included. Blocks follow each other with an empty line between them.
pub fn blocks(heads: &[String], rows: &[Vec<String>], indent: &str) -> Vec<String> {
    let width_of = |i: usize| {
        let cells = rows.iter().filter_map(|r| r.get(i)).map(|c| c.chars().count());
        cells.chain([heads[i].chars().count()]).max().unwrap_or(0)
    };
    let stub = indent.chars().count() + if heads.is_empty() { 0 } else { width_of(0) };
    let mut lines = Vec::new();
    let mut at = 1;
    loop {
        let (mut end, mut width) = (at, stub);
        while end < heads.len() && (end == at || width + 2 + width_of(end) <= WIDTH) {
            width += 2 + width_of(end);
            end += 1;
        }
        let pick = |row: &[String]| -> Vec<String> {
            row.first().into_iter().chain(row.get(at..end.min(row.len())).unwrap_or(&[])).cloned().collect()
        };
        let block: Vec<Vec<String>> =
            std::iter::once(pick(heads)).chain(rows.iter().map(|r| pick(r))).collect();
        if !lines.is_empty() {
            lines.push(String::new());
        }
        lines.extend(align(&block, indent, &[]));
        at = end;
        if at >= heads.len() {
            return lines;
        }
    }
}

/// `n thing` or `n things`.
pub fn counted(number: usize, singular: &str, plural: &str) -> String {
    format!("{number} {}", if number == 1 { singular } else { plural })
}

/// `a`, `a and b`, `a, b and c`.
pub fn listed<S: AsRef<str>>(items: &[S]) -> String {
    let texts: Vec<&str> = items.iter().map(AsRef::as_ref).collect();
    match texts.split_last() {
        None => String::new(),
        Some((last, [])) => (*last).to_owned(),
        Some((last, front)) => format!("{} and {last}", front.join(", ")),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn hostile_text_stays_on_its_line() {
        assert_eq!(
            plain("a\nb\u{1b}[2Jc\u{202e}d\u{2028}é \"<b>/"),
            "a\\nb\\u{1b}[2Jc\\u{202e}d\\u{2028}é \"<b>/"
        );
    }

    #[test]
    fn wrapping_keeps_every_word() {
        let text = "word ".repeat(60);
        let lines = wrap("  - ", "    ", &text);
        assert!(lines.len() > 2 && lines.iter().all(|l| l.chars().count() <= WIDTH));
        assert_eq!(lines.join(" ").matches("word").count(), 60);
        assert!(lines[1].starts_with("    word"));
    }

    #[test]
    fn a_wide_table_is_cut_into_blocks() {
        let heads: Vec<String> = (0..40).map(|i| format!("head{i}")).collect();
        let rows = vec![heads.clone(), heads.clone()];
        let lines = blocks(&heads, &rows, "  ");
        assert!(lines.iter().all(|l| l.chars().count() <= WIDTH));
        assert!(lines.iter().any(|l| l.starts_with("  head0  head1 ")));
        assert!(lines.iter().any(|l| l.starts_with("  head0") && l.ends_with("head39")));
    }

    #[test]
    fn lists_in_words() {
        assert_eq!(listed::<&str>(&[]), "");
        assert_eq!(listed(&["a"]), "a");
        assert_eq!(listed(&["a", "b", "c"]), "a, b and c");
    }
}
