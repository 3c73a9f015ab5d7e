//! A drawing brought to paper: SVG and PNG through plotters.

use super::drawing::{Anchor, Drawing, Mark, Spot, Words};
use super::font::{self, TextRule};
use crate::output::{OutputError, whole};
use plotters::coord::Shift;
use plotters::prelude::*;
use plotters::style::text_anchor::{HPos, Pos, VPos};
use plotters::style::{FontTransform, TextStyle};
use std::path::{Path, PathBuf};

/// Steps of an SVG's whole-number coordinates in a picture unit.
const SVG_STEPS: u32 = 4;
/// Pixels drawn in a picture unit of a PNG, before every square of [`SMOOTH`]² is averaged into one.
const PNG_STEPS: u32 = 3;
/// Side of the square of drawn pixels behind one pixel of the file: 1800 pixels across.
const SMOOTH: usize = 2;

/// Writes `name.svg` and `name.png` into a folder, each whole or not at all, and returns both paths.
///
/// # Errors
/// [`OutputError::Picture`] when plotters refuses, [`OutputError::File`] when the disk does.
pub(super) fn write_both(drawing: &Drawing, folder: &Path, name: &str) -> Result<Vec<PathBuf>, OutputError> {
    let (svg_path, png_path) = (folder.join(format!("{name}.svg")), folder.join(format!("{name}.png")));
    let text = svg(drawing)?;
    whole::write_bytes(&svg_path, text.as_bytes())?;
    write_png(drawing, &png_path)?;
    Ok(vec![svg_path, png_path])
}

/// The drawing as the text of an SVG.
pub(super) fn svg(drawing: &Drawing) -> Result<String, OutputError> {
    let (wide, high) = size(drawing, SVG_STEPS);
    let mut text = String::new();
    {
        let root = SVGBackend::with_string(&mut text, (wide, high)).into_drawing_area();
        paint(drawing, &root, f64::from(SVG_STEPS), font::SVG)?;
        root.present().map_err(|e| refused(drawing, &e))?;
    }
    // Shown at picture units, drawn at finer ones.
    let fine = format!("width=\"{wide}\" height=\"{high}\"");
    let shown = format!("width=\"{}\" height=\"{}\"", drawing.width, drawing.height);
    let title = format!("<title>{}</title>\n", escaped(&drawing.title));
    let text = text.replacen(&fine, &shown, 1);
    Ok(match text.find("<rect").or_else(|| text.find("<p")) {
        Some(at) => format!("{}{title}{}", &text[..at], &text[at..]),
        None => text,
    })
}

fn write_png(drawing: &Drawing, path: &Path) -> Result<(), OutputError> {
    let fine = size(drawing, PNG_STEPS);
    let mut pixels = vec![255u8; 3 * fine.0 as usize * fine.1 as usize];
    {
        let root = BitMapBackend::with_buffer(&mut pixels, fine).into_drawing_area();
        paint(drawing, &root, f64::from(PNG_STEPS), font::BITMAP)?;
        root.present().map_err(|e| refused(drawing, &e))?;
    }
    let (wide, high) = (fine.0 as usize / SMOOTH, fine.1 as usize / SMOOTH);
    let smooth = averaged(&pixels, fine.0 as usize, wide, high);
    whole::write_with(path, |file| {
        let mut target = BitMapBackend::new(file.path(), (wide as u32, high as u32));
        target.blit_bitmap((0, 0), (wide as u32, high as u32), &smooth).map_err(|e| refused(drawing, &e))?;
        target.present().map_err(|e| refused(drawing, &e))
    })
}

/// The mean of each square of `SMOOTH`² pixels.
fn averaged(pixels: &[u8], stride: usize, wide: usize, high: usize) -> Vec<u8> {
    let mut out = Vec::with_capacity(3 * wide * high);
    for row in 0..high {
        for column in 0..wide {
            for channel in 0..3 {
                let mut sum = 0u32;
                for down in 0..SMOOTH {
                    for right in 0..SMOOTH {
                        let at = (row * SMOOTH + down) * stride + column * SMOOTH + right;
                        sum += u32::from(pixels[3 * at + channel]);
                    }
                }
                out.push((sum / (SMOOTH * SMOOTH) as u32) as u8);
            }
        }
    }
    out
}

fn size(drawing: &Drawing, steps: u32) -> (u32, u32) {
    ((drawing.width * f64::from(steps)).round() as u32, (drawing.height * f64::from(steps)).round() as u32)
}

fn refused(drawing: &Drawing, reason: &dyn std::fmt::Display) -> OutputError {
    OutputError::Picture { what: drawing.title.clone(), reason: reason.to_string() }
}

fn escaped(text: &str) -> String {
    text.replace('&', "&amp;").replace('<', "&lt;").replace('>', "&gt;")
}

fn paint<B: DrawingBackend>(
    drawing: &Drawing,
    root: &DrawingArea<B, Shift>,
    steps: f64,
    rule: TextRule,
) -> Result<(), OutputError> {
    if !font::ready() {
        return Err(refused(drawing, &"the font carried in the program cannot be read"));
    }
    let place = |spot: &Spot| ((spot[0] * steps).round() as i32, (spot[1] * steps).round() as i32);
    root.fill(&WHITE).map_err(|e| refused(drawing, &e))?;
    for mark in &drawing.marks {
        let done = match mark {
            Mark::Line { points, width, grey } => {
                let style = shade(*grey).stroke_width((width * steps).round().max(1.0) as u32);
                root.draw(&PathElement::new(points.iter().map(place).collect::<Vec<_>>(), style))
            }
            Mark::Fill { points, grey } => {
                root.draw(&Polygon::new(points.iter().map(place).collect::<Vec<_>>(), shade(*grey).filled()))
            }
            Mark::Disc { centre, radius, grey } => {
                let radius = (radius * steps).round().max(1.0) as i32;
                root.draw(&Circle::new(place(centre), radius, shade(*grey).filled()))
            }
            Mark::Words(words) => write(words, root, steps, rule),
        };
        done.map_err(|e| refused(drawing, &e))?;
    }
    Ok(())
}

fn shade(grey: f64) -> RGBColor {
    let level = (255.0 * grey.clamp(0.0, 1.0)).round() as u8;
    RGBColor(level, level, level)
}

type Drawn<B> = Result<(), DrawingAreaErrorKind<<B as DrawingBackend>::ErrorType>>;

fn write<B: DrawingBackend>(words: &Words, root: &DrawingArea<B, Shift>, steps: f64, rule: TextRule) -> Drawn<B> {
    if words.ground {
        let area = words.extent().grown(1.5);
        let corner = |x: f64, y: f64| ((x * steps).round() as i32, (y * steps).round() as i32);
        let corners = [corner(area.left, area.top), corner(area.right, area.bottom)];
        root.draw(&Rectangle::new(corners, WHITE.filled()))?;
    }
    let across = match words.anchor {
        Anchor::Start => HPos::Left,
        Anchor::Middle => HPos::Center,
        Anchor::End => HPos::Right,
    };
    let mut desc = font::at_size(words.em * rule.size_per_em * steps);
    let drop = rule.drop_per_em * words.em;
    let [mut x, mut y] = words.at;
    if words.upwards {
        desc = desc.transform(FontTransform::Rotate270);
        x -= drop;
    } else {
        y -= drop;
    }
    let style = TextStyle::from(desc).color(&BLACK).pos(Pos::new(across, VPos::Top));
    root.draw_text(&words.text, &style, ((x * steps).round() as i32, (y * steps).round() as i32))
}
