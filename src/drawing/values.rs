//! The parts of a picture.

pub use crate::design::values::Pick;

/// A place in a picture, in points from its top left corner.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Point {
    /// To the right.
    pub x: f32,
    /// Downwards.
    pub y: f32,
}

impl Point {
    /// The point at (x, y).
    pub fn new(x: f32, y: f32) -> Self {
        Point { x, y }
    }
}

/// What an item means. The painter chooses the colour.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Ink {
    /// Text and main lines.
    Main,
    /// Labels, grids: there, but not in the way.
    Faint,
    /// Hairlines.
    Hair,
    /// The one accent: what is chosen or good.
    Accent,
    /// What is impossible.
    Bad,
    /// What is there for hazards alone, or fell later.
    Warn,
    /// One of a few well separated hues for sets and products, by number.
    Hue(u8),
    /// A wash of the accent, behind text.
    Wash,
    /// A grey wash, behind text.
    Shade,
}

/// Where a text stands relative to its point.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Anchor {
    /// The point is the left end, at half height.
    Left,
    /// The point is the centre.
    Centre,
    /// The point is the right end, at half height.
    Right,
}

/// A shape.
#[derive(Debug, Clone, PartialEq)]
pub enum Shape {
    /// A line of a width.
    Line {
        /// One end.
        from: Point,
        /// The other end.
        to: Point,
        /// Width in points.
        width: f32,
    },
    /// A line with a head at its end.
    Arrow {
        /// Start.
        from: Point,
        /// Head.
        to: Point,
        /// Width in points.
        width: f32,
    },
    /// A rectangle with round corners, stroked if `width` is above 0, else filled.
    Rect {
        /// Top left.
        min: Point,
        /// Bottom right.
        max: Point,
        /// Radius of the corners.
        radius: f32,
        /// Width of the stroke; 0 fills.
        width: f32,
    },
    /// A circle, stroked if `width` is above 0, else filled.
    Circle {
        /// Centre.
        centre: Point,
        /// Radius.
        radius: f32,
        /// Width of the stroke; 0 fills.
        width: f32,
    },
    /// A closed polygon: a translucent fill and a stroke.
    Outline {
        /// Corners, convex, in order.
        points: Vec<Point>,
        /// Width of the stroke.
        width: f32,
    },
    /// One line of text.
    Text {
        /// Where.
        at: Point,
        /// What.
        text: String,
        /// Height of the type in points.
        size: f32,
        /// How it stands at `at`.
        anchor: Anchor,
        /// Fixed-width figures and letters.
        mono: bool,
    },
}

/// A shape with its meaning.
#[derive(Debug, Clone, PartialEq)]
pub struct Item {
    /// What is drawn.
    pub shape: Shape,
    /// What it means.
    pub ink: Ink,
    /// What a click on it selects.
    pub pick: Option<Pick>,
}

/// A picture.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Picture {
    /// A name for screen readers and for the title of a file.
    pub title: String,
    /// Width and height in points.
    pub size: (f32, f32),
    /// Items, painted in this order.
    pub items: Vec<Item>,
    /// Hit regions (rectangles), later ones on top.
    pub hits: Vec<(Point, Point, Pick)>,
}

impl Picture {
    /// An empty picture.
    pub fn new(title: impl Into<String>) -> Self {
        Picture { title: title.into(), ..Picture::default() }
    }

    /// Adds a shape.
    pub fn add(&mut self, ink: Ink, shape: Shape) {
        self.items.push(Item { shape, ink, pick: None });
    }

    /// Adds a shape that stands for something.
    pub fn add_pick(&mut self, ink: Ink, pick: Pick, shape: Shape) {
        self.items.push(Item { shape, ink, pick: Some(pick) });
    }

    /// Adds a hit region.
    pub fn hit(&mut self, min: Point, max: Point, pick: Pick) {
        self.hits.push((min, max, pick));
    }

    /// A line of text in the proportional face.
    pub fn text(&mut self, ink: Ink, at: Point, anchor: Anchor, size: f32, text: impl Into<String>) {
        self.add(ink, Shape::Text { at, text: text.into(), size, anchor, mono: false });
    }

    /// A line of text in the fixed-width face.
    pub fn mono(&mut self, ink: Ink, at: Point, anchor: Anchor, size: f32, text: impl Into<String>) {
        self.add(ink, Shape::Text { at, text: text.into(), size, anchor, mono: true });
    }

    /// A straight line.
    pub fn line(&mut self, ink: Ink, from: Point, to: Point, width: f32) {
        self.add(ink, Shape::Line { from, to, width });
    }

    /// What lies under a point, topmost first.
    pub fn at(&self, p: Point) -> Option<Pick> {
        self.hits
            .iter()
            .rev()
            .find(|(min, max, _)| p.x >= min.x && p.x < max.x && p.y >= min.y && p.y < max.y)
            .map(|&(_, _, pick)| pick)
    }
}

/// A text of at most `most` characters. What is left out is in the middle: names that are long often differ at their ends.
pub fn elide(text: &str, most: usize) -> String {
    let n = text.chars().count();
    if n <= most || most < 3 {
        return text.chars().take(most).collect();
    }
    let tail = (most - 1) * 2 / 5;
    let head = most - 1 - tail;
    text.chars().take(head).chain(['…']).chain(text.chars().skip(n - tail)).collect()
}

/// Width that a text of `chars` characters takes at a size, on the safe side: pictures are laid out without a font.
pub fn text_width(chars: usize, size: f32) -> f32 {
    chars as f32 * size * 0.62
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn long_names_keep_both_ends() {
        assert_eq!(elide("dry", 12), "dry");
        assert_eq!(elide("opening_call_beam", 12), "opening…beam");
        assert_eq!(elide("opening_call_beam", 17), "opening_call_beam");
        assert_eq!(elide("äöüäöüäöüäöüß", 5), "äöü…ß");
        assert_eq!(elide("abc", 2), "ab");
    }
}
