//! `[feed]`.

use super::Check;
use crate::station::raw::{RawFeed, RawFeedAt, RawTransformer};
use crate::station::source::Written;
use crate::station::types::{Feed, FeedAt};

impl Check<'_> {
    pub(super) fn feed(&mut self, raw: Written<RawFeed>) -> Option<Feed> {
        let table = raw.place;
        let raw = raw.value;
        let along = raw.on.is_some();
        let at = self.feed_at(raw.at, raw.on);
        let hot = raw.hot.clone().map_or_else(Vec::new, |h| h.value);
        let cold = raw.cold.clone().map_or_else(Vec::new, |c| c.value);
        let mut known = Some(());
        for name in hot.iter().chain(&cold) {
            known = known.and(self.terminal_exists(name));
        }
        for name in hot.iter().filter(|h| h.value == "earth") {
            self.fault(name.place, "the earth cannot be the hot terminal", "write it under cold");
        }
        if let Some(name) = cold.iter().find(|c| hot.iter().any(|h| h.value == c.value)) {
            let reason = format!("\"{}\" is on both terminals", name.value);
            self.fault(
                name.place,
                reason,
                "keep it on one; to feed a conductor part of the way along write on = \"…\" and at = \"44 ft\"",
            );
            return None;
        }
        for (list, given, key) in
            [(&hot, raw.hot.as_ref().map(|h| h.place), "hot"), (&cold, raw.cold.as_ref().map(|c| c.place), "cold")]
        {
            if list.is_empty() && !along {
                let mend = format!("write {key} = [\"…\"] with the conductors that begin there");
                self.fault(given.unwrap_or(table), format!("nothing is on the {key} terminal"), mend);
                known = None;
            }
        }
        let impedance_ratio = match raw.transformer {
            Some(transformer) => Some(self.transformer(transformer)?),
            None => None,
        };
        let gap_m = match raw.gap {
            Some(gap) => {
                Some(self.above_zero(gap.map(|g| g.0), "the gap", 1.0, "write for example gap = \"3.2 mm\"")?)
            }
            None => None,
        };
        known?;
        Some(Feed { at: at?, hot, cold, impedance_ratio, gap_m })
    }

    fn feed_at(&mut self, at: Written<RawFeedAt>, on: Option<Written<String>>) -> Option<FeedAt> {
        let Some(on) = on else {
            let RawFeedAt::Point(point) = at.value else {
                self.fault(
                    at.place,
                    "a distance needs the conductor it runs along",
                    "add on = \"NAME\", or write a point",
                );
                return None;
            };
            let point = Written { value: point, place: at.place };
            self.point_exists(&point)?;
            return Some(FeedAt::Point(point));
        };
        let known = self.conductor_exists(&on);
        let Some(at_m) = at.value.distance_m() else {
            self.fault(
                at.place,
                "with `on`, the feed point is a distance along that conductor",
                "write at = \"44 ft\"",
            );
            return None;
        };
        known.map(|()| FeedAt::Along { on, at_m: Written { value: at_m, place: at.place } })
    }

    /// A conductor, a star of radials, or the earth.
    fn terminal_exists(&mut self, name: &Written<String>) -> Option<()> {
        if name.value == "earth" || self.stars.contains(&name.value) { Some(()) } else { self.conductor_exists(name) }
    }

    fn transformer(&mut self, raw: Written<RawTransformer>) -> Option<f64> {
        const MEND: &str = "write transformer = { ratio = \"49:1\" } or { turns = [3, 21] }";
        let ratio = match (raw.value.ratio, raw.value.turns) {
            (Some(ratio), None) => ratio.map(|r| r.0),
            (None, Some(turns)) => match turns.value.as_slice() {
                [radio, antenna] if radio.value > 0.0 && antenna.value > 0.0 => {
                    Written { value: (antenna.value / radio.value).powi(2), place: turns.place }
                }
                _ => {
                    self.fault(turns.place, "turns are two numbers above zero: radio side, antenna side", MEND);
                    return None;
                }
            },
            (Some(_), Some(turns)) => {
                self.fault(turns.place, "the ratio is given twice", "keep one of ratio and turns");
                return None;
            }
            (None, None) => {
                self.fault(raw.place, "this transformer has no ratio", MEND);
                return None;
            }
        };
        self.above_zero(ratio, "the ratio", 1e6, MEND).map(|r| r.value)
    }
}
