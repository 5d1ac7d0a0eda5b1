//! JSON with a line for each thing that a reader would call one thing.
//!
//! Down to the entries of a stage's lists everything has its own line; inside an entry it stays on that line. A
//! thousand pairs are then a thousand lines, and a difference between two records shows the pair that changed.

use std::io;

use serde::Serialize;
use serde_json::ser::Formatter;

/// Brackets nested deeper than this are written on one line.
const DEPTH: usize = 3;

/// The value as JSON with a newline at the end. `None` only if the value refuses to be serialised.
pub fn to_lines(value: &impl Serialize) -> Option<String> {
    let mut bytes = Vec::new();
    let mut writer = serde_json::Serializer::with_formatter(&mut bytes, Lines::default());
    value.serialize(&mut writer).ok()?;
    bytes.push(b'\n');
    String::from_utf8(bytes).ok()
}

#[derive(Default)]
struct Lines {
    depth: usize,
    filled: bool,
}

impl Lines {
    fn open<W: ?Sized + io::Write>(&mut self, writer: &mut W, bracket: &[u8]) -> io::Result<()> {
        self.depth += 1;
        self.filled = false;
        writer.write_all(bracket)
    }

    fn close<W: ?Sized + io::Write>(&mut self, writer: &mut W, bracket: &[u8]) -> io::Result<()> {
        self.depth -= 1;
        if self.filled && self.depth < DEPTH {
            self.newline(writer)?;
        }
        self.filled = true;
        writer.write_all(bracket)
    }

    fn next<W: ?Sized + io::Write>(&mut self, writer: &mut W, first: bool) -> io::Result<()> {
        if self.depth <= DEPTH {
            if !first {
                writer.write_all(b",")?;
            }
            self.newline(writer)
        } else if first {
            Ok(())
        } else {
            writer.write_all(b", ")
        }
    }

    fn newline<W: ?Sized + io::Write>(&self, writer: &mut W) -> io::Result<()> {
        writer.write_all(b"\n")?;
        (0..self.depth).try_for_each(|_| writer.write_all(b"  "))
    }
}

impl Formatter for Lines {
    fn begin_array<W: ?Sized + io::Write>(&mut self, writer: &mut W) -> io::Result<()> {
        self.open(writer, b"[")
    }

    fn end_array<W: ?Sized + io::Write>(&mut self, writer: &mut W) -> io::Result<()> {
        self.close(writer, b"]")
    }

    fn begin_array_value<W: ?Sized + io::Write>(&mut self, writer: &mut W, first: bool) -> io::Result<()> {
        self.next(writer, first)
    }

    fn end_array_value<W: ?Sized + io::Write>(&mut self, _: &mut W) -> io::Result<()> {
        self.filled = true;
        Ok(())
    }

    fn begin_object<W: ?Sized + io::Write>(&mut self, writer: &mut W) -> io::Result<()> {
        self.open(writer, b"{")
    }

    fn end_object<W: ?Sized + io::Write>(&mut self, writer: &mut W) -> io::Result<()> {
        self.close(writer, b"}")
    }

    fn begin_object_key<W: ?Sized + io::Write>(&mut self, writer: &mut W, first: bool) -> io::Result<()> {
        self.next(writer, first)
    }

    fn begin_object_value<W: ?Sized + io::Write>(&mut self, writer: &mut W) -> io::Result<()> {
        writer.write_all(b": ")
    }

    fn end_object_value<W: ?Sized + io::Write>(&mut self, _: &mut W) -> io::Result<()> {
        self.filled = true;
        Ok(())
    }
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
        assert_eq!(serde_json::from_str::<serde_json::Value>(&text).expect("parses"), value);
    }
}
