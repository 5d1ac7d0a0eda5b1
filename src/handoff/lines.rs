//! JSON with a line for each thing that a reader would call one thing.
//!
//! Down to the entries of a stage's lists everything has its own line; inside an entry it stays on that line. A
//! thousand pairs are then a thousand lines, and a difference between two records shows the pair that changed.
//! Linear in the length of the text.

use serde::Serialize;

/// Brackets nested deeper than this are written on one line.
const DEPTH: usize = 3;

/// The value as JSON with a newline at the end. `None` only if the value refuses to be serialised.
pub fn to_lines(value: &impl Serialize) -> Option<String> {
    serde_json::to_string(value).ok().map(|text| broken(&text))
}

/// Compact JSON, broken into lines.
fn broken(compact: &str) -> String {
    let mut out = String::with_capacity(compact.len() + compact.len() / 4);
    let mut chars = compact.chars().peekable();
    let (mut depth, mut quoted, mut escaped) = (0, false, false);
    while let Some(c) = chars.next() {
        if quoted {
            out.push(c);
            quoted = escaped || c != '"';
            escaped = c == '\\' && !escaped;
            continue;
        }
        match c {
            '"' => {
                out.push(c);
                quoted = true;
            }
            '[' | '{' => {
                out.push(c);
                depth += 1;
                // An empty list or map stays together.
                if let Some(end) = chars.next_if(|&next| matches!(next, ']' | '}')) {
                    depth -= 1;
                    out.push(end);
                } else if depth <= DEPTH {
                    newline(&mut out, depth);
                }
            }
            ']' | '}' => {
                depth -= 1;
                if depth < DEPTH {
                    newline(&mut out, depth);
                }
                out.push(c);
            }
            ',' => {
                out.push(c);
                if depth <= DEPTH {
                    newline(&mut out, depth);
                } else {
                    out.push(' ');
                }
            }
            ':' => out.push_str(": "),
            _ => out.push(c),
        }
    }
    out.push('\n');
    out
}

fn newline(out: &mut String, depth: usize) {
    out.push('\n');
    (0..depth).for_each(|_| out.push_str("  "));
}

#[cfg(test)]
mod tests {
    use super::*;
    use serde_json::json;

    #[test]
    fn entries_have_a_line_each() {
        let value = json!({"none": [], "one": {"list": [{"a": [1, 2], "b": {}}, 3]}});
        let text = to_lines(&value).expect("serialises");
        assert_eq!(
            text,
            "{\n  \"none\": [],\n  \"one\": {\n    \"list\": [\n      {\"a\": [1, 2], \"b\": {}},\n      3\n    ]\n  }\n}\n"
        );
    }

    #[test]
    fn brackets_and_quotes_inside_strings_are_left_alone() {
        let value = json!({"a\\": ["{\"x\": [1,2]}", "\\", ",\n\"", {"k:": "]"}]});
        let text = to_lines(&value).expect("serialises");
        assert_eq!(serde_json::from_str::<serde_json::Value>(&text).expect("parses"), value);
        assert_eq!(text.lines().count(), 10);
    }
}
