//! `history.csv` and `profile.csv`: recorded states as tables, one head row, units in the columns' names.

use super::text::{column_head, degc, number};
use crate::answer::Findings;
use crate::section::Section;
use std::io::Write;

/// Writes the histories: one row a recorded time. A value that does not exist (the centre of an empty line) is an empty cell.
///
/// # Errors
/// Whatever the writer reports.
pub fn write_history(writer: impl Write, findings: &Findings) -> Result<(), csv::Error> {
    let (section, history) = (&findings.section, &findings.history);
    let mut table = csv::Writer::from_writer(writer);

    let mut heads: Vec<String> =
        ["time_s", "air_degC", "centre_degC", "content_mean_degC", "frozen_fraction"].map(String::from).into();
    for layer in &section.layers {
        heads.push(format!("{}_inside_degC", layer.name));
        heads.push(format!("{}_outside_degC", layer.name));
    }
    heads.extend(section.heaters.iter().map(|heater| format!("{}_w_per_m", heater.name)));
    heads.push("lost_w_per_m".into());
    heads.extend(section.probes.iter().map(|probe| format!("{}_degC", probe.name)));
    table.write_record(heads.iter().map(|head| column_head(head)))?;

    for row in 0..history.times_s.len() {
        let temperature = |kelvin: f64| number(degc(kelvin));
        let mut cells = vec![
            number(history.times_s[row]),
            temperature(history.air_k[row]),
            temperature(history.centre_k[row]),
            temperature(history.content_mean_k[row]),
            number(history.frozen_share[row]),
        ];
        cells.extend(history.faces_k.row(row).iter().map(|&kelvin| temperature(kelvin)));
        cells.extend(history.heaters_w_per_m.row(row).iter().map(|&output| number(output)));
        cells.push(number(history.lost_w_per_m[row]));
        cells.extend(history.probes_k.row(row).iter().map(|&kelvin| temperature(kelvin)));
        table.write_record(cells)?;
    }
    table.flush()?;
    Ok(())
}

/// Writes the radial profiles in long form: one row a recorded time and radius. A contact gives two rows of equal radius.
///
/// # Errors
/// Whatever the writer reports.
pub fn write_profile(writer: impl Write, findings: &Findings) -> Result<(), csv::Error> {
    let history = &findings.history;
    let mut table = csv::Writer::from_writer(writer);
    table.write_record(["time_s", "radius_mm", "temperature_degC", "layer"])?;
    let radii = history.profile_radii_m.as_slice().expect("radii lie in one piece");
    let names: Vec<String> = regions(&findings.section, radii).into_iter().map(|name| column_head(&name)).collect();
    for (row, &time_s) in history.times_s.iter().enumerate() {
        let time = number(time_s);
        for (column, (&radius_m, name)) in radii.iter().zip(&names).enumerate() {
            let temperature = number(degc(history.profiles_k[[row, column]]));
            table.write_record([time.as_str(), &number(radius_m * 1e3), &temperature, name])?;
        }
    }
    table.flush()?;
    Ok(())
}

/// Name of the region that each radius of a profile belongs to: `content` or a layer. Where a face occurs twice, its
/// first entry belongs to what lies inside it and its second to what lies outside.
fn regions(section: &Section, radii_m: &[f64]) -> Vec<String> {
    radii_m
        .iter()
        .enumerate()
        .map(|(index, &radius_m)| {
            let slack = 1e-9 * section.outermost_radius_m();
            let repeats = index > 0 && (radius_m - radii_m[index - 1]).abs() <= slack;
            let reaches =
                |outside_m: f64| if repeats { radius_m < outside_m - slack } else { radius_m <= outside_m + slack };
            if reaches(section.content.radius_m) {
                return "content".to_string();
            }
            let layer = section.layers.iter().find(|layer| reaches(layer.outside_radius_m));
            layer.or(section.layers.last()).map_or_else(|| "content".to_string(), |layer| layer.name.clone())
        })
        .collect()
}
