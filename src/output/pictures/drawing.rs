//! A picture as a list of marks in picture units (1200 across), before any backend: what tests can look at.

use super::font;

/// A place in the picture: right, down.
pub(super) type Spot = [f64; 2];

/// Left, top, right, bottom.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Area {
    pub(super) left: f64,
    pub(super) top: f64,
    pub(super) right: f64,
    pub(super) bottom: f64,
}

impl Area {
    pub(super) fn new(left: f64, top: f64, right: f64, bottom: f64) -> Self {
        Self { left, top, right, bottom }
    }

    pub(super) fn width(&self) -> f64 {
        self.right - self.left
    }

    pub(super) fn height(&self) -> f64 {
        self.bottom - self.top
    }

    pub(super) fn grown(&self, by: f64) -> Self {
        Self::new(self.left - by, self.top - by, self.right + by, self.bottom + by)
    }

    pub(super) fn meets(&self, other: &Self) -> bool {
        self.left < other.right && other.left < self.right && self.top < other.bottom && other.top < self.bottom
    }

    pub(super) fn holds(&self, inner: &Self) -> bool {
        inner.left >= self.left && inner.right <= self.right && inner.top >= self.top && inner.bottom <= self.bottom
    }
}

/// Which part of the text stands at its spot.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Anchor {
    Start,
    Middle,
    End,
}

/// A line of text; the spot is on its baseline.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Words {
    pub(super) at: Spot,
    pub(super) em: f64,
    pub(super) anchor: Anchor,
    pub(super) text: String,
    /// Reads upwards.
    pub(super) upwards: bool,
    /// Drawn on a white ground, to be read across lines.
    pub(super) ground: bool,
}

impl Words {
    /// Height of capitals over the em, DejaVu Sans (1493 of 2048 units).
    pub(super) const CAPITAL: f64 = 0.729;

    pub(super) fn new(at: Spot, em: f64, anchor: Anchor, text: impl Into<String>) -> Self {
        Self { at, em, anchor, text: text.into(), upwards: false, ground: false }
    }

    /// Text whose capitals are centred on the height of `at`.
    pub(super) fn centred(at: Spot, em: f64, anchor: Anchor, text: impl Into<String>) -> Self {
        Self::new([at[0], at[1] + 0.5 * Self::CAPITAL * em], em, anchor, text)
    }

    pub(super) fn grounded(mut self) -> Self {
        self.ground = true;
        self
    }

    pub(super) fn upwards(mut self) -> Self {
        self.upwards = true;
        self
    }

    /// What the text covers, from capitals to a little below the baseline.
    pub(super) fn extent(&self) -> Area {
        let wide = font::width(&self.text, self.em);
        let before = match self.anchor {
            Anchor::Start => 0.0,
            Anchor::Middle => 0.5 * wide,
            Anchor::End => wide,
        };
        let (up, down) = (0.78 * self.em, 0.2 * self.em);
        let [x, y] = self.at;
        if self.upwards {
            Area::new(x - up, y + before - wide, x + down, y + before)
        } else {
            Area::new(x - before, y - up, x - before + wide, y + down)
        }
    }
}

/// Something drawn. Greys run from 0 (black) to 1 (white).
#[derive(Debug, Clone, PartialEq)]
pub(super) enum Mark {
    Line { points: Vec<Spot>, width: f64, grey: f64 },
    Fill { points: Vec<Spot>, grey: f64 },
    Disc { centre: Spot, radius: f64, grey: f64 },
    Words(Words),
}

/// How a line is broken: lengths of strokes and gaps in turn; empty is unbroken.
pub(super) type Pattern = &'static [f64];

/// Line patterns told apart in black and white, most conspicuous first.
pub(super) const PATTERNS: [Pattern; 6] =
    [&[], &[11.0, 5.0], &[2.2, 4.0], &[14.0, 4.0, 2.2, 4.0], &[5.0, 3.5], &[14.0, 4.0, 2.2, 4.0, 2.2, 4.0]];

/// A picture.
#[derive(Debug, Clone)]
pub(super) struct Drawing {
    /// Said to people who do not see it, and by the browser.
    pub(super) title: String,
    pub(super) width: f64,
    pub(super) height: f64,
    pub(super) marks: Vec<Mark>,
    /// By how much everything drawn next is moved down, because the heading takes more lines than two.
    lowered: f64,
}

/// Width of every picture.
pub(super) const WIDTH: f64 = 1200.0;
/// Size of ordinary text.
pub(super) const EM: f64 = 15.0;
/// Size of the small text of ticks and notes.
pub(super) const SMALL: f64 = 13.0;
/// Size of the heading.
pub(super) const HEADING: f64 = 20.0;
/// Lines of the heading, and of what stands below it, at most.
const MOST_LINES: usize = 4;

impl Drawing {
    /// An empty picture with its heading, and smaller text below it. `height` counts one line of each; where they need more,
    /// the picture grows and all that is drawn later moves down.
    pub(super) fn new(height: f64, heading: &str, below: &str) -> Self {
        let mut drawing = Self { title: heading.to_string(), width: WIDTH, height, marks: Vec::new(), lowered: 0.0 };
        for (text, em, first, step) in [(heading, HEADING, 36.0, 26.0), (below, EM, 60.0, 20.0)] {
            let lines = wrapped(text, em, WIDTH - 60.0, MOST_LINES);
            for (index, line) in lines.iter().enumerate() {
                drawing.write([30.0, first + step * index as f64], em, Anchor::Start, line.as_str());
            }
            let more = step * lines.len().saturating_sub(1) as f64;
            drawing.lowered += more;
            drawing.height += more;
        }
        drawing
    }

    fn lower(&self, points: &[Spot]) -> Vec<Spot> {
        points.iter().map(|[x, y]| [*x, y + self.lowered]).collect()
    }

    pub(super) fn line(&mut self, points: &[Spot], width: f64, grey: f64) {
        if points.len() > 1 {
            self.marks.push(Mark::Line { points: self.lower(points), width, grey });
        }
    }

    /// A line broken by a pattern, which runs on around corners.
    pub(super) fn patterned(&mut self, points: &[Spot], width: f64, grey: f64, pattern: Pattern) {
        if pattern.is_empty() {
            return self.line(points, width, grey);
        }
        for stroke in strokes(points, pattern) {
            self.line(&stroke, width, grey);
        }
    }

    pub(super) fn fill(&mut self, points: Vec<Spot>, grey: f64) {
        self.marks.push(Mark::Fill { points: self.lower(&points), grey });
    }

    pub(super) fn rectangle(&mut self, area: Area, grey: f64) {
        let Area { left, top, right, bottom } = area;
        self.fill(vec![[left, top], [right, top], [right, bottom], [left, bottom]], grey);
    }

    pub(super) fn outline(&mut self, area: Area, width: f64, grey: f64) {
        let Area { left, top, right, bottom } = area;
        self.line(&[[left, top], [right, top], [right, bottom], [left, bottom], [left, top]], width, grey);
    }

    pub(super) fn disc(&mut self, centre: Spot, radius: f64, grey: f64) {
        self.marks.push(Mark::Disc { centre: [centre[0], centre[1] + self.lowered], radius, grey });
    }

    /// A circle with a white inside.
    pub(super) fn ring(&mut self, centre: Spot, radius: f64, width: f64) {
        self.disc(centre, radius, 0.0);
        self.disc(centre, radius - width, 1.0);
    }

    pub(super) fn words(&mut self, mut words: Words) {
        if !words.text.is_empty() {
            words.at[1] += self.lowered;
            self.marks.push(Mark::Words(words));
        }
    }

    pub(super) fn write(&mut self, at: Spot, em: f64, anchor: Anchor, text: impl Into<String>) {
        self.words(Words::new(at, em, anchor, text));
    }

    /// What is written, with what each text covers.
    #[cfg(test)]
    pub(super) fn texts(&self) -> Vec<(&str, Area)> {
        self.marks
            .iter()
            .filter_map(|mark| match mark {
                Mark::Words(words) => Some((words.text.as_str(), words.extent())),
                _ => None,
            })
            .collect()
    }
}

/// The text, or as much of it as fits with an ellipsis.
pub(super) fn fitted(text: &str, em: f64, room: f64) -> String {
    if font::width(text, em) <= room {
        return text.to_string();
    }
    let mut cut: Vec<char> = text.chars().collect();
    while cut.pop().is_some() {
        let shorter: String = cut.iter().collect::<String>().trim_end().to_string() + "…";
        if font::width(&shorter, em) <= room {
            return shorter;
        }
    }
    String::new()
}

/// The text in lines no wider than `room`, broken between words; what goes beyond `most` lines ends in an ellipsis.
pub(super) fn wrapped(text: &str, em: f64, room: f64, most: usize) -> Vec<String> {
    let mut lines: Vec<String> = vec![String::new()];
    for word in text.split_whitespace() {
        let full = lines.len() == most;
        if let Some(line) = lines.last_mut() {
            let longer = if line.is_empty() { word.to_string() } else { format!("{line} {word}") };
            if line.is_empty() || full || font::width(&longer, em) <= room {
                *line = longer;
            } else {
                lines.push(word.to_string());
            }
        }
    }
    lines.iter().map(|line| fitted(line, em, room)).collect()
}

/// Cuts a polyline into strokes after a pattern.
fn strokes(points: &[Spot], pattern: Pattern) -> Vec<Vec<Spot>> {
    let mut out = Vec::new();
    let (mut phase, mut left, mut stroke) = (0, pattern[0], Vec::new());
    for pair in points.windows(2) {
        let ([x0, y0], [x1, y1]) = (pair[0], pair[1]);
        let whole = (x1 - x0).hypot(y1 - y0);
        let mut done = 0.0;
        if phase % 2 == 0 && stroke.is_empty() {
            stroke.push(pair[0]);
        }
        while whole - done > left {
            done += left;
            let spot = [x0 + (x1 - x0) * done / whole, y0 + (y1 - y0) * done / whole];
            if phase % 2 == 0 {
                stroke.push(spot);
                out.push(std::mem::take(&mut stroke));
            } else {
                stroke = vec![spot];
            }
            phase = (phase + 1) % pattern.len();
            left = pattern[phase];
        }
        left -= whole - done;
        if phase % 2 == 0 {
            stroke.push(pair[1]);
        }
    }
    if stroke.len() > 1 {
        out.push(stroke);
    }
    out
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    #[test]
    fn strokes_keep_their_lengths_around_a_corner() {
        let cut = strokes(&[[0.0, 0.0], [10.0, 0.0], [10.0, 10.0]], &[8.0, 4.0]);
        assert_eq!(cut.len(), 2);
        assert_eq!(cut[0], vec![[0.0, 0.0], [8.0, 0.0]]);
        assert_eq!(cut[1], vec![[10.0, 2.0], [10.0, 10.0]]);
    }

    #[test]
    fn long_text_is_cut_to_its_room() {
        let cut = fitted("a station with a very long title indeed", 15.0, 120.0);
        assert!(cut.ends_with('…') && font::width(&cut, 15.0) <= 120.0, "{cut}");
        assert_eq!(fitted("short", 15.0, 120.0), "short");
    }

    #[test]
    fn a_long_heading_takes_lines_and_moves_the_rest_down() {
        let why = "within limits on all four bands, as written and in all three variants ".repeat(3);
        let mut drawing = Drawing::new(100.0, "hut", &why);
        drawing.write([30.0, 90.0], EM, Anchor::Start, "next");
        drawing.disc([30.0, 95.0], 2.0, 0.0);
        let texts = drawing.texts();
        let said: Vec<&str> = texts[1..texts.len() - 1].iter().map(|(text, _)| *text).collect();
        assert_eq!(said.join(" "), why.trim());
        assert_eq!(drawing.height, 100.0 + 20.0 * (said.len() - 1) as f64);
        assert!(said.len() > 1 && texts[said.len()].1.bottom < texts[said.len() + 1].1.top);
        super::super::checks::texts_are_clear(&drawing);
    }

    #[test]
    fn lines_break_between_words_and_only_the_last_is_cut() {
        let lines = wrapped("one two three four five six seven", 15.0, 80.0, 2);
        assert_eq!(lines[0], "one two");
        assert!(lines.len() == 2 && lines[1].starts_with("three") && lines[1].ends_with('…'), "{lines:?}");
        assert_eq!(wrapped("short", 15.0, 80.0, 2), ["short"]);
    }
}
