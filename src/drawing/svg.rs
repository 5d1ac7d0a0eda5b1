//! A picture as an SVG 1.1 document, for light paper. Linear in the number of items; the same picture gives the same bytes.

use std::fmt::Write as _;

use crate::drawing::values::{Anchor, Ink, Picture, Point, Shape};

/// Writes the picture. Names from the project are escaped: nothing in them can become markup.
pub fn svg(picture: &Picture) -> String {
    let (w, h) = picture.size;
    let mut out = format!(
        "<svg xmlns=\"http://www.w3.org/2000/svg\" width=\"{w:.0}\" height=\"{h:.0}\" viewBox=\"0 0 {w:.0} {h:.0}\" \
         font-family=\"DejaVu Sans, sans-serif\">\n<title>{}</title>\n<rect width=\"100%\" height=\"100%\" fill=\"#ffffff\"/>\n",
        escape(&picture.title)
    );
    for item in &picture.items {
        shape(&mut out, &item.shape, colour(item.ink), opacity(item.ink));
    }
    out.push_str("</svg>\n");
    out
}

/// Colours of the inks on light paper.
fn colour(ink: Ink) -> &'static str {
    const HUES: [&str; 8] =
        ["#1b6ca8", "#b0552a", "#3f7d3a", "#8a4a9e", "#a0721a", "#2f8583", "#a83d5e", "#5a5fb0"];
    match ink {
        Ink::Main => "#1c1f24",
        Ink::Faint => "#6b7280",
        Ink::Hair => "#c9ced6",
        Ink::Accent => "#0b6e6e",
        Ink::Bad => "#b3261e",
        Ink::Warn => "#9a6700",
        Ink::Hue(i) => HUES[usize::from(i) % HUES.len()],
        Ink::Wash => "#d9eeec",
        Ink::Shade => "#eef0f3",
    }
}

fn opacity(ink: Ink) -> f32 {
    if matches!(ink, Ink::Hue(_)) { 0.10 } else { 0.0 }
}

fn shape(out: &mut String, shape: &Shape, colour: &str, fill: f32) {
    // Writing to a string cannot fail.
    let _ = match shape {
        Shape::Line { from, to, width } => line(out, *from, *to, *width, colour),
        Shape::Arrow { from, to, width } => {
            let (dx, dy) = (to.x - from.x, to.y - from.y);
            let length = (dx * dx + dy * dy).sqrt().max(0.01);
            let (ux, uy) = (dx / length, dy / length);
            let head = 5.0 + width;
            let base = Point::new(to.x - ux * head, to.y - uy * head);
            let side = head * 0.5;
            line(out, *from, base, *width, colour).and_then(|()| {
                writeln!(
                    out,
                    "<polygon points=\"{:.1},{:.1} {:.1},{:.1} {:.1},{:.1}\" fill=\"{colour}\"/>",
                    to.x,
                    to.y,
                    base.x - uy * side,
                    base.y + ux * side,
                    base.x + uy * side,
                    base.y - ux * side
                )
            })
        }
        Shape::Rect { min, max, radius, width } => writeln!(
            out,
            "<rect x=\"{:.1}\" y=\"{:.1}\" width=\"{:.1}\" height=\"{:.1}\" rx=\"{radius:.1}\" {}/>",
            min.x,
            min.y,
            (max.x - min.x).max(0.0),
            (max.y - min.y).max(0.0),
            paint(colour, *width, fill)
        ),
        Shape::Circle { centre, radius, width } => writeln!(
            out,
            "<circle cx=\"{:.1}\" cy=\"{:.1}\" r=\"{radius:.1}\" {}/>",
            centre.x,
            centre.y,
            paint(colour, *width, fill)
        ),
        Shape::Outline { points, width } => {
            let list: Vec<String> = points.iter().map(|p| format!("{:.1},{:.1}", p.x, p.y)).collect();
            let paint = paint(colour, *width, fill.max(0.08));
            writeln!(out, "<polygon points=\"{}\" stroke-linejoin=\"round\" {paint}/>", list.join(" "))
        }
        Shape::Text { at, text, size, anchor, mono } => {
            let anchor = match anchor {
                Anchor::Left => "start",
                Anchor::Centre => "middle",
                Anchor::Right => "end",
            };
            let face = if *mono { " font-family=\"DejaVu Sans Mono, monospace\"" } else { "" };
            writeln!(
                out,
                "<text x=\"{:.1}\" y=\"{:.1}\" font-size=\"{size:.1}\" text-anchor=\"{anchor}\"{face} fill=\"{colour}\">{}</text>",
                at.x,
                // Text stands with its middle at the point; viewers disagree on baseline keywords, figures are safe.
                at.y + size * 0.36,
                escape(text)
            )
        }
    };
}

fn line(out: &mut String, from: Point, to: Point, width: f32, colour: &str) -> std::fmt::Result {
    writeln!(
        out,
        "<line x1=\"{:.1}\" y1=\"{:.1}\" x2=\"{:.1}\" y2=\"{:.1}\" stroke=\"{colour}\" stroke-width=\"{width:.1}\"/>",
        from.x, from.y, to.x, to.y
    )
}

fn paint(colour: &str, width: f32, fill: f32) -> String {
    if width <= 0.0 {
        format!("fill=\"{colour}\"")
    } else if fill > 0.0 {
        format!(
            "fill=\"{colour}\" fill-opacity=\"{fill:.2}\" stroke=\"{colour}\" stroke-width=\"{width:.1}\""
        )
    } else {
        format!("fill=\"none\" stroke=\"{colour}\" stroke-width=\"{width:.1}\"")
    }
}

/// Text that is safe in XML; characters that XML 1.0 cannot hold become U+FFFD.
pub fn escape(text: &str) -> String {
    text.chars().fold(String::with_capacity(text.len()), |mut out, c| {
        match c {
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '"' => out.push_str("&quot;"),
            '\'' => out.push_str("&#39;"),
            c if c < ' ' || c == '\u{fffe}' || c == '\u{ffff}' => out.push('\u{fffd}'),
            c => out.push(c),
        }
        out
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_cannot_become_markup() {
        let mut picture = Picture::new("<script>alert('x')</script>\u{0}");
        picture.text(Ink::Main, Point::new(1.0, 2.0), Anchor::Left, 10.0, "</text>\"&\u{1b}");
        let text = svg(&picture);
        assert!(!text.contains("<script>") && !text.contains("</text>\"") && !text.contains('\u{1b}'));
        assert!(text.contains("&lt;script&gt;"));
    }
}
