//! Graphical symbols after IEC 60617 (shapes from memory): terminal, inductor with magnetic core, earth, and a box for the radio.

use super::drawing::{Area, Drawing, Spot};

/// Terminal: a small circle. Marks the feed point.
pub(super) fn terminal(drawing: &mut Drawing, at: Spot) -> Area {
    drawing.ring(at, 6.0, 1.6);
    around(at, 7.0, 7.0)
}

/// Inductor with core, lying along a direction: four half circles on the line, a bar beside them. Marks a choke.
pub(super) fn choke(drawing: &mut Drawing, at: Spot, along: Spot) -> Area {
    const HUMPS: usize = 4;
    const RADIUS: f64 = 4.0;
    // The bar is above, or left of a line that runs up or down.
    let across = upper(along);
    let place = |a: f64, c: f64| [at[0] + a * along[0] + c * across[0], at[1] + a * along[1] + c * across[1]];
    let half = RADIUS * HUMPS as f64;
    drawing.fill(vec![place(-half, -5.0), place(half, -5.0), place(half, 11.0), place(-half, 11.0)], 1.0);
    let mut points = vec![place(-half, 0.0)];
    for hump in 0..HUMPS {
        let middle = -half + RADIUS * (2.0 * hump as f64 + 1.0);
        for step in 1..=10 {
            let angle = std::f64::consts::PI * (1.0 - f64::from(step) / 10.0);
            points.push(place(middle + RADIUS * angle.cos(), RADIUS * angle.sin()));
        }
    }
    drawing.line(&points, 1.8, 0.0);
    drawing.line(&[place(-half, 8.0), place(half, 8.0)], 1.8, 0.0);
    around(at, half, half)
}

/// Impedance: an open box on the line. Marks an inline part.
pub(super) fn part(drawing: &mut Drawing, at: Spot, along: Spot) -> Area {
    let across = [along[1], -along[0]];
    let place = |a: f64, c: f64| [at[0] + a * along[0] + c * across[0], at[1] + a * along[1] + c * across[1]];
    let corners = vec![place(-14.0, -6.0), place(14.0, -6.0), place(14.0, 6.0), place(-14.0, 6.0)];
    drawing.fill(corners.clone(), 1.0);
    drawing.line(&[corners.as_slice(), &corners[..1]].concat(), 1.8, 0.0);
    around(at, 14.0, 14.0)
}

/// Earth: a lead and three bars, each shorter; `at` is the top of the lead.
pub(super) fn earth(drawing: &mut Drawing, at: Spot) -> Area {
    let [x, y] = at;
    drawing.line(&[[x, y], [x, y + 9.0]], 1.6, 0.0);
    for (row, half) in [11.0, 7.0, 3.0].into_iter().enumerate() {
        let down = y + 9.0 + 4.5 * row as f64;
        drawing.line(&[[x - half, down], [x + half, down]], 1.6, 0.0);
    }
    Area::new(x - 12.0, y, x + 12.0, y + 20.0)
}

/// Where the coax goes through the wall: two bars across it.
pub(super) fn entry(drawing: &mut Drawing, at: Spot, along: Spot) -> Area {
    let across = [along[1], -along[0]];
    for shift in [-3.0, 3.0] {
        let middle = [at[0] + shift * along[0], at[1] + shift * along[1]];
        let end = |c: f64| [middle[0] + c * across[0], middle[1] + c * across[1]];
        drawing.line(&[end(-10.0), end(10.0)], 2.0, 0.0);
    }
    around(at, 10.0, 10.0)
}

/// The radio: a box.
pub(super) fn radio(drawing: &mut Drawing, at: Spot) -> Area {
    let area = around(at, 10.0, 7.0);
    drawing.rectangle(area, 1.0);
    drawing.outline(area, 1.8, 0.0);
    area
}

fn around(at: Spot, wide: f64, high: f64) -> Area {
    Area::new(at[0] - wide, at[1] - high, at[0] + wide, at[1] + high)
}

/// The unit vector across a direction that points up the paper, or left of one that runs straight up or down.
pub(super) fn upper(along: Spot) -> Spot {
    let across = [along[1], -along[0]];
    if across[1] > 1e-6 || (across[1].abs() <= 1e-6 && across[0] > 0.0) { [-across[0], -across[1]] } else { across }
}
