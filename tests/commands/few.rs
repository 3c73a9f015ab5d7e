//! A catalogue of a few rows, so that what is tested is the reader; the figures are round, not data.

use braidwise::station::{Cable, Catalogue};

pub(crate) struct Few;

impl Catalogue for Few {
    fn band(&self, name: &str, _: u32) -> Option<(String, f64, f64)> {
        match name {
            "40" | "40 m" => Some(("40 m".to_owned(), 7.0e6, 7.2e6)),
            "20" | "20 m" => Some(("20 m".to_owned(), 14.0e6, 14.35e6)),
            _ => None,
        }
    }
    fn metal(&self, name: &str) -> Option<f64> {
        (name == "copper").then_some(58e6)
    }
    fn cable(&self, name: &str) -> Option<Cable> {
        (name == "RG-58").then(|| Cable {
            shield_diameter_m: 3.6e-3,
            jacket: Some((3.0, 0.7e-3)),
            impedance_ohm: 50.0,
            velocity_factor: 0.66,
            loss: vec![(10e6, 4.6), (100e6, 15.0)],
        })
    }
    fn soil(&self, name: &str) -> Option<(f64, f64)> {
        ["wet meadow", "dry sand"].contains(&name).then_some((10.0, 5e-3))
    }
    fn band_names(&self, _: u32) -> Vec<String> {
        vec!["40 m".to_owned(), "20 m".to_owned()]
    }
    fn metal_names(&self) -> Vec<String> {
        vec!["copper".to_owned()]
    }
    fn cable_names(&self) -> Vec<String> {
        vec!["RG-58".to_owned()]
    }
    fn soil_names(&self) -> Vec<String> {
        vec!["wet meadow".to_owned(), "dry sand".to_owned()]
    }
}
