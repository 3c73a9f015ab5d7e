//! The catalogue against what its sources print.

use braidwise::catalogue::{
    ExposedGroup, band, band_names, cable, cable_names, current_limits, field_limit_at, field_limits, metal,
    metal_names, soil, soil_names, soil_names_and_aliases,
};

/// Wave impedance of free space, ohm (SI).
const ETA_OHM: f64 = 376.730_313;

#[test]
fn bands_follow_the_radio_regulations_of_each_region() {
    // ITU Radio Regulations, Article 5, as printed on regional pages: 80 m and 40 m differ by region, 20 m does not.
    let edges = |name, region| band(name, region).map(|b| (b.low_hz, b.high_hz)).unwrap();
    assert_eq!(edges("80 m", 1), (3.5e6, 3.8e6));
    assert_eq!(edges("80 m", 2), (3.5e6, 4.0e6));
    assert_eq!(edges("80 m", 3), (3.5e6, 3.9e6));
    assert_eq!(edges("40", 1), (7.0e6, 7.2e6));
    assert_eq!(edges("40", 2), (7.0e6, 7.3e6));
    assert_eq!(edges("160m", 1), (1.81e6, 1.85e6));
    for region in 1..=3 {
        assert_eq!(edges("20", region), (14.0e6, 14.35e6));
        assert_eq!(edges("60 m", region), (5.3515e6, 5.3665e6));
        assert_eq!(edges("10 metres", region), (28.0e6, 29.7e6));
    }
}

#[test]
fn bands_answer_to_number_and_unit_and_to_nothing_else() {
    assert_eq!(band_names().len(), 10);
    for written in ["40", "40 m", "40m", " 40 M ", "40 metres", "40-meter"] {
        assert_eq!(band(written, 1).unwrap().name, "40 m", "{written}");
    }
    for written in ["", "m", "4", "400", "7", "40 km", "40 ft", "forty"] {
        assert_eq!(band(written, 1), None, "{written}");
    }
    assert_eq!(band("40", 0), None);
    assert_eq!(band("40", 4), None);
}

#[test]
fn copper_is_the_international_annealed_standard() {
    // IEC, 1913: 0.15328 ohm for a wire of 1 m and 1 g at 20 °C, density 8.89 g/cm3 = 58 MS/m.
    let from_definition = 8.89e6 / 0.15328;
    assert!((metal("copper").unwrap().conductivity_s_per_m / from_definition - 1.0).abs() < 1e-3);
    // Industrial Power Engineering and Applications Handbook, p. 970.
    assert!((metal("aluminum").unwrap().conductivity_s_per_m - 34.80e6).abs() < 1.0);
    // A copper trade association: stainless 302 is 3 % IACS, printed to one figure.
    assert!((metal("stainless").unwrap().conductivity_s_per_m / 58e6 - 0.03).abs() < 0.01);
}

#[test]
fn cables_meet_their_published_dimensions() {
    // MIL-C-17/28 and /74 in a published summary of 2004: jackets 4.95 and 10.3 mm, dielectrics 2.95 and 7.25 mm.
    for (name, jacket_mm, dielectric_mm) in [("RG-58", 4.95, 2.95), ("rg213", 10.3, 7.25)] {
        let row = cable(name).unwrap();
        let outer_mm = (row.shield_diameter_m + 2.0 * row.jacket_thickness_m) * 1e3;
        assert!((outer_mm - jacket_mm).abs() < 1e-9, "{name}");
        assert!(row.shield_diameter_m * 1e3 > dielectric_mm && row.shield_diameter_m * 1e3 < jacket_mm - 1.0);
        assert_eq!(row.impedance_ohm, 50.0);
        // Solid polyethylene, permittivity 2.26.
        assert!((row.velocity_factor - 1.0 / 2.26_f64.sqrt()).abs() < 0.006);
    }
    // National licence manual, corrected table 6-1, dB per 100 ft at 30 and 150 MHz.
    for (name, at_30, at_150) in [("RG-58", 2.47, 5.63), ("RG-213", 1.08, 2.53), ("RG-8X", 1.96, 4.53)] {
        let loss = &cable(name).unwrap().loss;
        assert!((loss[0].1 * 0.3048 - at_30).abs() < 0.006, "{name}");
        assert!((loss[1].1 * 0.3048 - at_150).abs() < 0.02, "{name}");
    }
}

#[test]
fn thicker_cable_of_one_family_loses_less() {
    let loss = |name: &str| cable(name).unwrap().loss[0].1 / cable(name).unwrap().loss[0].0.sqrt();
    assert!(loss("RG-174") > loss("RG-58") && loss("RG-58") > loss("RG-213"));
    assert!(loss("RG-316") > loss("RG-142"));
    assert!(loss("RG-59") > loss("RG-11"));
}

#[test]
fn soils_carry_the_handbook_classes() {
    // Common practice; table of US soil types: permittivity, S/m.
    let classes = [
        ("average", 13.0, 5e-3),
        ("very good", 20.0, 30.3e-3),
        ("Very Poor", 5.0, 1e-3),
        ("extremely poor", 3.0, 1e-3),
    ];
    for (name, permittivity, conductivity) in classes {
        let row = soil(name).unwrap();
        assert_eq!(row.permittivity, permittivity, "{name}");
        assert!((row.conductivity_s_per_m - conductivity).abs() < 1e-9, "{name}");
    }
    // ITU-R P.527-3: permittivities 30, 15 and 3 confirmed, conductivities from memory.
    for (name, permittivity, conductivity) in
        [("wet ground", 30.0, 1e-2), ("medium dry ground", 15.0, 1e-3), ("very dry ground", 3.0, 1e-4)]
    {
        let row = soil(name).unwrap();
        assert_eq!(row.permittivity, permittivity, "{name}");
        assert!((row.conductivity_s_per_m - conductivity).abs() < 1e-9, "{name}");
    }
    assert_eq!(soil("Wet  Meadow").unwrap().name, "wet meadow");
    assert!(soil("moon dust").is_none());
}

#[test]
fn federal_exposure_rows_agree_with_their_own_power_densities() {
    // 47 CFR 1.1310 Table 1 prints 900/f2 and 180/f2 mW/cm2 beside the fields: E2/eta = 10 W/m2 per mW/cm2.
    for (group, printed) in [(ExposedGroup::Occupational, 900.0), (ExposedGroup::Public, 180.0)] {
        let row = field_limit_at("47 CFR 1.1310", group, 7.1e6).unwrap();
        let density = row.electric_v_per_m.at(7.1e6).powi(2) / ETA_OHM / 10.0;
        assert!((density / (printed / 7.1 / 7.1) - 1.0).abs() < 2e-3);
    }
    // Values printed in the tables at a frequency.
    let general = field_limit_at("47 CFR 1.1310", ExposedGroup::Public, 14.2e6).unwrap();
    assert!((general.electric_v_per_m.at(14.2e6) - 58.0).abs() < 0.1);
    let controlled = field_limit_at("47 CFR 1.1310", ExposedGroup::Occupational, 1.9e6).unwrap();
    assert_eq!(controlled.electric_v_per_m.at(1.9e6), 614.0);
    assert!(field_limit_at("47 CFR 1.1310", ExposedGroup::Public, 1e3).is_none());
}

#[test]
fn international_levels_meet_their_neighbours_at_30_mhz() {
    // ICNIRP 2020 table 5: constant 27.7 V/m (public) and 61 V/m (occupational) from 30 MHz up.
    for (group, electric, magnetic) in [(ExposedGroup::Public, 27.7, 0.073), (ExposedGroup::Occupational, 61.0, 0.16)] {
        let row = field_limit_at("ICNIRP 2020 whole body", group, 30e6).unwrap();
        assert!((row.electric_v_per_m.at(30e6) / electric - 1.0).abs() < 0.01);
        assert!((row.magnetic_a_per_m.at(30e6) / magnetic - 1.0).abs() < 0.03);
    }
    assert!(current_limits().iter().any(|row| row.kind == "contact" && row.limit_a == 0.02));
}

#[test]
fn every_row_is_possible_names_its_source_and_answers_to_one_name_only() {
    for name in metal_names() {
        let row = metal(name).unwrap();
        assert!(row.conductivity_s_per_m > 1e4 && row.conductivity_s_per_m < 7e7 && row.source.len() > 8, "{name}");
    }
    for name in cable_names() {
        let row = cable(name).unwrap();
        assert!(row.jacket_thickness_m > 1e-4 && row.jacket_permittivity >= 2.0 && row.source.len() > 8, "{name}");
        assert!((0.5..1.0).contains(&row.velocity_factor) && row.loss.windows(2).all(|p| p[0].1 < p[1].1), "{name}");
    }
    let mut names = soil_names_and_aliases();
    for name in &names {
        let row = soil(name).unwrap();
        assert!(row.source.len() > 8);
        assert!(row.name == *name || row.aliases.iter().any(|alias| alias == name), "{name} is taken by {}", row.name);
    }
    for name in soil_names() {
        let row = soil(name).unwrap();
        assert_eq!(row.name, name, "an alias hides this row");
        assert!((1.0..=81.0).contains(&row.permittivity) && row.conductivity_s_per_m > 0.0);
    }
    let count = names.len();
    names.sort_unstable();
    names.dedup();
    assert_eq!(names.len(), count, "two soils share a name");
    assert!(field_limits().iter().all(|row| row.source.len() > 8 && row.low_hz < row.high_hz));
}
