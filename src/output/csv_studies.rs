//! The arrays of the placement and length studies as rows, one value of every quantity a row.

use super::OutputError;
use super::csv::number;
use crate::outcome::cut::CutOutcome;
use crate::outcome::place::{OverFrequency, OverPlace, PlaceOutcome};
use std::io::Write;

/// Quantities of a placement, in the order of the columns.
const PLACE: [&str; 15] = [
    "variant",
    "choke",
    "frequency_hz",
    "band",
    "place_m",
    "entry_current_a",
    "entry_voltage_v",
    "end_voltage_v",
    "last_metre_current_a",
    "feed_resistance_ohm",
    "feed_reactance_ohm",
    "swr",
    "choke_w",
    "choke_v",
    "choke_a",
];

/// Quantities of a scan, in the order of the columns.
const CUT: [&str; 13] = [
    "variant",
    "frequency_hz",
    "band",
    "length_m",
    "second_length_m",
    "entry_current_a",
    "entry_voltage_v",
    "end_voltage_v",
    "last_metre_current_a",
    "feed_resistance_ohm",
    "feed_reactance_ohm",
    "swr",
    "radiated_fraction",
];

/// One row for every variant, choke, frequency and place; rows without choke and place are the station without a choke.
///
/// # Errors
/// [`OutputError::Rows`] or [`OutputError::Stream`] when `target` refuses.
pub fn place(place: &PlaceOutcome, target: impl Write) -> Result<(), OutputError> {
    let mut rows = ::csv::Writer::from_writer(target);
    rows.write_record(PLACE)?;
    for (v, variant) in place.variants.iter().enumerate() {
        for (f, hz) in place.frequencies_hz.iter().enumerate() {
            let head = [variant.clone(), String::new(), hz.to_string(), band(&place.bands, f), String::new()];
            let without = &place.without;
            let one = |values: &OverFrequency<f64>| number(values.get(v).and_then(|w| w.get(f)).copied());
            let maybe = |values: &OverFrequency<Option<f64>>| number(values.get(v).and_then(|w| *w.get(f)?));
            let feed = without.feed_ohm.get(v).and_then(|w| w.get(f));
            let values = [
                one(&without.entry_current_a),
                maybe(&without.entry_voltage_v),
                maybe(&without.end_voltage_v),
                one(&without.last_metre_current_a),
                number(feed.map(|z| z.re)),
                number(feed.map(|z| z.im)),
                one(&without.swr),
                String::new(),
                String::new(),
                String::new(),
            ];
            rows.write_record(head.iter().chain(&values))?;
        }
        for (c, choke) in place.chokes.iter().enumerate() {
            for (f, hz) in place.frequencies_hz.iter().enumerate() {
                for (p, place_m) in place.places_m.iter().enumerate() {
                    let head = [
                        variant.clone(),
                        choke.name.clone(),
                        hz.to_string(),
                        band(&place.bands, f),
                        place_m.to_string(),
                    ];
                    let values = at_place(place, [v, c, f, p]);
                    rows.write_record(head.iter().chain(&values))?;
                }
            }
        }
    }
    rows.flush()?;
    Ok(())
}

fn at_place(place: &PlaceOutcome, [v, c, f, p]: [usize; 4]) -> [String; 10] {
    fn get<T: Copy>(values: &OverPlace<T>, [v, c, f, p]: [usize; 4]) -> Option<T> {
        values.get(v)?.get(c)?.get(f)?.get(p).copied()
    }
    let at = [v, c, f, p];
    let feed = get(&place.feed_ohm, at);
    [
        number(get(&place.entry_current_a, at)),
        number(get(&place.entry_voltage_v, at).flatten()),
        number(get(&place.end_voltage_v, at).flatten()),
        number(get(&place.last_metre_current_a, at)),
        number(feed.map(|z| z.re)),
        number(feed.map(|z| z.im)),
        number(get(&place.swr, at)),
        number(get(&place.choke_w, at)),
        number(get(&place.choke_v, at)),
        number(get(&place.choke_a, at)),
    ]
}

/// One row for every variant, frequency and length (and second length).
///
/// # Errors
/// [`OutputError::Rows`] or [`OutputError::Stream`] when `target` refuses.
pub fn cut(cut: &CutOutcome, target: impl Write) -> Result<(), OutputError> {
    let mut rows = ::csv::Writer::from_writer(target);
    rows.write_record(CUT)?;
    let seconds: Vec<Option<f64>> = match &cut.second_lengths_m {
        Some(lengths) => lengths.iter().copied().map(Some).collect(),
        None => vec![None],
    };
    for (v, variant) in cut.variants.iter().enumerate() {
        for (f, hz) in cut.frequencies_hz.iter().enumerate() {
            for (l, length_m) in cut.lengths_m.iter().enumerate() {
                for (s, second_m) in seconds.iter().enumerate() {
                    let head =
                        [variant.clone(), hz.to_string(), band(&cut.bands, f), length_m.to_string(), number(*second_m)];
                    let feed = cut.feed_ohm.get(v, f, l, s);
                    let values = [
                        number(cut.entry_current_a.get(v, f, l, s).copied()),
                        number(cut.entry_voltage_v.get(v, f, l, s).copied().flatten()),
                        number(cut.end_voltage_v.get(v, f, l, s).copied().flatten()),
                        number(cut.last_metre_current_a.get(v, f, l, s).copied()),
                        number(feed.map(|z| z.re)),
                        number(feed.map(|z| z.im)),
                        number(cut.swr.get(v, f, l, s).copied()),
                        number(cut.radiated_fraction.get(v, f, l, s).copied()),
                    ];
                    rows.write_record(head.iter().chain(&values))?;
                }
            }
        }
    }
    rows.flush()?;
    Ok(())
}

fn band(bands: &[Option<String>], index: usize) -> String {
    bands.get(index).cloned().flatten().unwrap_or_default()
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;
    use crate::output::sample_studies;

    fn read(bytes: &[u8]) -> (::csv::StringRecord, Vec<::csv::StringRecord>) {
        let mut reader = ::csv::Reader::from_reader(bytes);
        (reader.headers().unwrap().clone(), reader.records().map(Result::unwrap).collect())
    }

    #[test]
    fn every_place_is_a_row_with_its_own_values() {
        let sample = sample_studies::place();
        let mut bytes = Vec::new();
        place(&sample, &mut bytes).unwrap();
        let (headers, rows) = read(&bytes);
        assert_eq!(rows.len(), 2 * 13 + 2 * 3 * 13 * 601);
        let column = |name: &str| headers.iter().position(|h| h == name).unwrap();
        // Second variant, third choke, fifth frequency, place 100.
        let row = &rows[13 + 3 * 13 * 601 + 13 + (2 * 13 + 4) * 601 + 100];
        assert_eq!(&row[column("choke")], "5 kohm");
        assert_eq!(row[column("choke_w")].parse::<f64>().unwrap(), sample.choke_w[1][2][4][100]);
        assert_eq!(&rows[0][column("choke")], "");
    }

    #[test]
    fn every_length_is_a_row_and_so_is_every_pair() {
        let mut bytes = Vec::new();
        cut(&sample_studies::cut(), &mut bytes).unwrap();
        assert_eq!(read(&bytes).1.len(), 2 * 13 * 81);
        let two = sample_studies::cut_two();
        let mut bytes = Vec::new();
        cut(&two, &mut bytes).unwrap();
        let (headers, rows) = read(&bytes);
        assert_eq!(rows.len(), 2 * 13 * 81 * 21);
        let swr = headers.iter().position(|h| h == "swr").unwrap();
        assert_eq!(rows[22][swr].parse::<f64>().unwrap(), *two.swr.get(0, 0, 1, 1).unwrap());
    }
}
