//! `[points]`.

use super::Check;
use crate::station::raw::{RawLocation, RawPoints};
use crate::station::types::{Location, NamedPoint};

impl Check<'_> {
    pub(super) fn named_points(&mut self, raw: RawPoints) -> Option<Vec<NamedPoint>> {
        let points: Vec<Option<NamedPoint>> = raw
            .0
            .into_iter()
            .map(|(name, location)| {
                let location = match location {
                    RawLocation::At(at) => Location::At(at),
                    RawLocation::From(raw) => {
                        self.name_exists(&raw.from.value, raw.from.place)?;
                        if raw.out.value.0 < 0.0 {
                            self.fault(
                                raw.out.place,
                                "a distance out cannot be negative",
                                "turn the bearing by 180 degrees instead",
                            );
                            return None;
                        }
                        Location::From {
                            from: raw.from,
                            bearing_deg: raw.bearing.value.0,
                            out_m: raw.out.value.0,
                            height: raw.height.map(|h| h.value),
                        }
                    }
                };
                Some(NamedPoint { name, location })
            })
            .collect();
        let points: Vec<NamedPoint> = points.into_iter().collect::<Option<_>>()?;
        self.no_circles(&points)?;
        Some(points)
    }

    /// Following `from` from any point ends at coordinates.
    fn no_circles(&mut self, points: &[NamedPoint]) -> Option<()> {
        for start in points {
            let mut at = start;
            for _ in 0..=points.len() {
                let Location::From { from, .. } = &at.location else { break };
                let next = points.iter().find(|p| p.name.value == from.value)?;
                if std::ptr::eq(next, start) {
                    let reason = format!("point \"{}\" is measured from itself", start.name.value);
                    self.fault(start.name.place, reason, "give one point of the circle by coordinates");
                    return None;
                }
                at = next;
            }
        }
        Some(())
    }
}
