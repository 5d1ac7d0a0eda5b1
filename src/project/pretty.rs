//! Laying out RON: brackets that stand on one line where they fit, else one item a line. Linear in the text.

/// Characters of a line, as far as a line can be broken at all.
const WIDTH: usize = 110;
const INDENT: usize = 4;

/// A piece of RON that is yet to be laid out.
pub(super) enum Doc {
    /// Text that is never broken by the layout.
    Atom(String),
    /// A bracket with its items.
    Group(Group),
}

/// A bracket with its items.
pub(super) struct Group {
    open: String,
    items: Vec<Doc>,
    close: &'static str,
    style: Style,
    /// Characters on one line.
    flat: usize,
}

#[derive(Clone, Copy, PartialEq)]
enum Style {
    /// On one line where it fits, else one item a line.
    Fit,
    /// One item a line in any case.
    Lines,
    /// On one line where it fits, else only the last item, a bracket, is broken.
    Hug,
}

impl Doc {
    pub(super) fn atom(text: impl Into<String>) -> Doc {
        Doc::Atom(text.into())
    }

    /// On one line where it fits, else one item a line.
    pub(super) fn fit(open: &str, items: Vec<Doc>, close: &'static str) -> Doc {
        Doc::group(open, items, close, Style::Fit)
    }

    /// One item a line, unless there is none.
    pub(super) fn lines(open: &str, items: Vec<Doc>, close: &'static str) -> Doc {
        Doc::group(open, items, close, Style::Lines)
    }

    /// On one line where it fits, else the last item, which must be a bracket, is broken.
    pub(super) fn hug(open: &str, items: Vec<Doc>, close: &'static str) -> Doc {
        Doc::group(open, items, close, Style::Hug)
    }

    fn group(open: &str, items: Vec<Doc>, close: &'static str, style: Style) -> Doc {
        let commas = 2 * items.len().saturating_sub(1);
        let flat = width(open) + width(close) + commas + items.iter().map(Doc::width).sum::<usize>();
        Doc::Group(Group { open: open.to_owned(), items, close, style, flat })
    }

    /// The same with `name: ` in front.
    pub(super) fn named(self, name: &str) -> Doc {
        match self {
            Doc::Atom(text) => Doc::Atom(format!("{name}: {text}")),
            Doc::Group(mut group) => {
                group.open = format!("{name}: {}", group.open);
                group.flat += width(name) + 2;
                Doc::Group(group)
            }
        }
    }

    fn width(&self) -> usize {
        match self {
            Doc::Atom(text) => width(text),
            Doc::Group(group) => group.flat,
        }
    }

    /// The whole as text, from the left margin.
    pub(super) fn render(&self) -> String {
        let mut out = String::new();
        self.lay(0, &mut out);
        out
    }

    fn lay(&self, indent: usize, out: &mut String) {
        match self {
            Doc::Group(group) if !group.items.is_empty() => {
                // One more character for the comma that follows.
                let fits = indent + group.flat < WIDTH;
                match (group.style, group.items.split_last()) {
                    (Style::Fit | Style::Hug, _) if fits => self.lay_flat(out),
                    (Style::Hug, Some((Doc::Group(last), first))) => {
                        out.push_str(&group.open);
                        for item in first {
                            item.lay_flat(out);
                            out.push_str(", ");
                        }
                        last.lay_lines(indent, out);
                        out.push_str(group.close);
                    }
                    _ => group.lay_lines(indent, out),
                }
            }
            _ => self.lay_flat(out),
        }
    }

    fn lay_flat(&self, out: &mut String) {
        match self {
            Doc::Atom(text) => out.push_str(text),
            Doc::Group(group) => {
                out.push_str(&group.open);
                for (i, item) in group.items.iter().enumerate() {
                    if i > 0 {
                        out.push_str(", ");
                    }
                    item.lay_flat(out);
                }
                out.push_str(group.close);
            }
        }
    }
}

impl Group {
    fn lay_lines(&self, indent: usize, out: &mut String) {
        out.push_str(&self.open);
        if !self.items.is_empty() {
            out.push('\n');
            for item in &self.items {
                out.push_str(&spaces(indent + INDENT));
                item.lay(indent + INDENT, out);
                out.push_str(",\n");
            }
            out.push_str(&spaces(indent));
        }
        out.push_str(self.close);
    }
}

fn spaces(count: usize) -> String {
    " ".repeat(count)
}

fn width(text: &str) -> usize {
    text.chars().count()
}

/// A RON string on one line.
pub(super) fn string(text: &str) -> String {
    let mut out = String::with_capacity(text.len() + 2);
    out.push('"');
    text.chars().for_each(|c| escape(c, &mut out));
    out.push('"');
    out
}

/// A RON string of several lines, for the field `name` at this indent: each line ends with a continuation, so that
/// neither the indent nor a changed line ending becomes part of the text. A short string without line breaks stays on its line.
pub(super) fn long_string(name: &str, text: &str, indent: usize) -> String {
    let flat = string(text);
    if !text.contains('\n') && indent + width(name) + 2 + width(&flat) < WIDTH {
        return flat;
    }
    let margin = spaces(indent + INDENT);
    let mut out = String::from("\"\\\n");
    let mut lines = text.split_inclusive('\n').peekable();
    while let Some(line) = lines.next() {
        let mut pieces = wrap(line, WIDTH - indent - INDENT).into_iter().peekable();
        while let Some(piece) = pieces.next() {
            out.push_str(&margin);
            out.push_str(&piece);
            if pieces.peek().is_some() || lines.peek().is_some() {
                out.push_str("\\\n");
            }
        }
    }
    out.push('"');
    out
}

/// Escaped pieces of a line, each as wide as it may be with the backslash that follows. A piece never begins with a
/// blank, because a continuation would swallow it.
fn wrap(line: &str, room: usize) -> Vec<String> {
    let mut pieces = Vec::new();
    let mut piece = String::new();
    let (mut filled, mut previous_blank) = (0, false);
    // A word carries the blanks after it.
    let mut words = line.split_inclusive(' ').peekable();
    if let Some(rest) = line.strip_prefix(' ') {
        piece.push_str("\\u{20}");
        filled = width(&piece);
        words = rest.split_inclusive(' ').peekable();
    }
    for word in words {
        let mut escaped = String::new();
        word.chars().for_each(|c| escape(c, &mut escaped));
        let breakable = previous_blank && word != " ";
        if breakable && filled + width(&escaped) >= room {
            pieces.push(std::mem::take(&mut piece));
            filled = 0;
        }
        filled += width(&escaped);
        piece.push_str(&escaped);
        previous_blank = word.ends_with(' ');
    }
    pieces.push(piece);
    pieces
}

fn escape(c: char, out: &mut String) {
    match c {
        '"' => out.push_str("\\\""),
        '\\' => out.push_str("\\\\"),
        '\n' => out.push_str("\\n"),
        '\r' => out.push_str("\\r"),
        '\t' => out.push_str("\\t"),
        '\0' => out.push_str("\\0"),
        c if unseen(c) => out.push_str(&format!("\\u{{{:x}}}", u32::from(c))),
        c => out.push(c),
    }
}

/// Characters that a reader of the file would not see, or that would turn the text around.
fn unseen(c: char) -> bool {
    c.is_control()
        || matches!(c, '\u{ad}' | '\u{61c}' | '\u{200b}'..='\u{200f}' | '\u{2028}'..='\u{202e}')
        || matches!(c, '\u{2060}'..='\u{206f}' | '\u{feff}' | '\u{fff9}'..='\u{fffb}' | '\u{e0000}'..='\u{e007f}')
}
