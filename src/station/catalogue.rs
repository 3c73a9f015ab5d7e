//! What the reader asks of the catalogue.

use crate::catalogue;

/// A cable's data.
#[derive(Debug, Clone, PartialEq)]
pub struct Cable {
    /// Outside of the shield, m.
    pub shield_diameter_m: f64,
    /// Jacket: relative permittivity, thickness m.
    pub jacket: Option<(f64, f64)>,
    /// Characteristic impedance, ohm.
    pub impedance_ohm: f64,
    /// Velocity factor.
    pub velocity_factor: f64,
    /// Loss points: Hz, dB per 100 m.
    pub loss: Vec<(f64, f64)>,
}

/// Look-ups by name. A name is matched by the catalogue (case, aliases); the lists are for suggestions.
pub trait Catalogue {
    /// Canonical name, low and high edge in Hz of an amateur band in an ITU region (1 to 3).
    fn band(&self, name: &str, region: u32) -> Option<(String, f64, f64)>;
    /// Conductivity of a metal, S/m.
    fn metal(&self, name: &str) -> Option<f64>;
    /// A coaxial cable.
    fn cable(&self, name: &str) -> Option<Cable>;
    /// Relative permittivity and conductivity (S/m) of a soil.
    fn soil(&self, name: &str) -> Option<(f64, f64)>;
    /// Names of bands in a region.
    fn band_names(&self, region: u32) -> Vec<String>;
    /// Names of metals.
    fn metal_names(&self) -> Vec<String>;
    /// Names of cables.
    fn cable_names(&self) -> Vec<String>;
    /// Names of soils.
    fn soil_names(&self) -> Vec<String>;
}

/// The catalogue that ships with the program, [`crate::catalogue`].
#[derive(Debug, Clone, Copy, Default)]
pub struct Embedded;

impl Catalogue for Embedded {
    fn band(&self, name: &str, region: u32) -> Option<(String, f64, f64)> {
        let band = catalogue::band(name, u8::try_from(region).ok()?)?;
        Some((band.name, band.low_hz, band.high_hz))
    }

    fn metal(&self, name: &str) -> Option<f64> {
        catalogue::metal(name).map(|m| m.conductivity_s_per_m)
    }

    fn cable(&self, name: &str) -> Option<Cable> {
        catalogue::cable(name).map(|c| Cable {
            shield_diameter_m: c.shield_diameter_m,
            jacket: Some((c.jacket_permittivity, c.jacket_thickness_m)),
            impedance_ohm: c.impedance_ohm,
            velocity_factor: c.velocity_factor,
            loss: c.loss.clone(),
        })
    }

    fn soil(&self, name: &str) -> Option<(f64, f64)> {
        catalogue::soil(name).map(|s| (s.permittivity, s.conductivity_s_per_m))
    }

    fn band_names(&self, _region: u32) -> Vec<String> {
        owned(catalogue::band_names())
    }

    fn metal_names(&self) -> Vec<String> {
        owned(catalogue::metal_names())
    }

    fn cable_names(&self) -> Vec<String> {
        owned(catalogue::cable_names())
    }

    fn soil_names(&self) -> Vec<String> {
        owned(catalogue::soil_names_and_aliases())
    }
}

fn owned(names: Vec<&'static str>) -> Vec<String> {
    names.into_iter().map(str::to_owned).collect()
}

#[cfg(test)]
pub(crate) mod double {
    //! A catalogue of a few rows for tests; the figures are round, not data.
    use super::{Cable, Catalogue};

    pub(crate) struct Few;

    impl Catalogue for Few {
        fn band(&self, name: &str, region: u32) -> Option<(String, f64, f64)> {
            let high = if region == 2 { 7.3e6 } else { 7.2e6 };
            match name.trim_end_matches(['m', ' ']) {
                "40" => Some(("40 m".to_owned(), 7.0e6, high)),
                "20" => Some(("20 m".to_owned(), 14.0e6, 14.35e6)),
                _ => None,
            }
        }
        fn metal(&self, name: &str) -> Option<f64> {
            match name {
                "copper" => Some(58e6),
                "steel" => Some(6e6),
                _ => None,
            }
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
            match name {
                "wet meadow" => Some((20.0, 0.02)),
                "dry sand" => Some((5.0, 1e-3)),
                _ => None,
            }
        }
        fn band_names(&self, _: u32) -> Vec<String> {
            vec!["40 m".to_owned(), "20 m".to_owned()]
        }
        fn metal_names(&self) -> Vec<String> {
            vec!["copper".to_owned(), "steel".to_owned()]
        }
        fn cable_names(&self) -> Vec<String> {
            vec!["RG-58".to_owned()]
        }
        fn soil_names(&self) -> Vec<String> {
            vec!["wet meadow".to_owned(), "dry sand".to_owned()]
        }
    }
}
