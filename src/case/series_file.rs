//! A temperature over time from a CSV file.
//!
//! ```text
//! time_h,air_degC            time;air_degF
//! 0,-5                       2031-01-05T18:00;21
//! 1,-7.5                     2031-01-05T19:00;18.5
//! ```
//!
//! The head row names the columns with their units. Times are numbers (`time_s`, `time_min`, `time_h`, `time_d`),
//! counted from the case's 0 h, or ISO 8601 stamps, counted from the first row. Columns are parted by commas,
//! semicolons or tabs.

use super::raw::{Located, SeriesFile};
use super::text_file;
use crate::faults::{Fault, Faults, Span, nearest, quoted};
use crate::series::Series;
use crate::units::{Kind, Unit, accepted, find_unit};
use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

/// Largest series file [bytes].
const MOST_BYTES: u64 = 64 << 20;
/// Faults told of one column before the rest is counted only.
const MOST_FAULTS: usize = 8;

/// Files beside the case, each read once.
pub(super) struct SeriesFiles<'a> {
    folder: &'a Path,
    /// Number of the source in the faults and its text; `None` for a file that could not be read.
    read: BTreeMap<PathBuf, Option<(usize, String)>>,
}

impl<'a> SeriesFiles<'a> {
    pub fn new(folder: &'a Path) -> Self {
        SeriesFiles { folder, read: BTreeMap::new() }
    }

    /// Texts of all files that were read, in the order of their paths.
    pub fn texts(&self) -> impl Iterator<Item = &str> {
        self.read.values().flatten().map(|(_, text)| text.as_str())
    }

    /// Reads one column as temperatures [K] over time [s].
    pub fn temperature(&mut self, wanted: &SeriesFile, faults: &mut Faults) -> Option<Series> {
        let path = self.folder.join(&wanted.file.value);
        if !self.read.contains_key(&path) {
            let found = match text_file::read(&path, &wanted.file.value, MOST_BYTES) {
                Ok(text) => Some((faults.add_source(wanted.file.value.clone(), text.clone()), text)),
                Err(fault) => {
                    faults.push(
                        Fault::error(wanted.file.span, fault.message)
                            .label("not read")
                            .note("a path is relative to the folder of the case")
                            .help_if(fault.help),
                    );
                    None
                }
            };
            self.read.insert(path.clone(), found);
        }
        let (source, text) = self.read.get(&path)?.as_ref()?;
        Csv::open(*source, text, wanted, faults)?.column(wanted, faults)
    }
}

struct Csv<'t> {
    source: usize,
    text: &'t str,
    delimiter: u8,
    heads: Vec<String>,
    head_span: Span,
    rows: Vec<csv::StringRecord>,
}

impl<'t> Csv<'t> {
    fn open(source: usize, text: &'t str, wanted: &SeriesFile, faults: &mut Faults) -> Option<Self> {
        let head = text.lines().next().unwrap_or("");
        let delimiter = *b",;\t".iter().max_by_key(|&&mark| head.bytes().filter(|&byte| byte == mark).count())?;
        // Of equal counts the last is taken; a head without any is one column.
        let delimiter = if head.bytes().any(|byte| byte == delimiter) { delimiter } else { b',' };
        let mut reader = csv::ReaderBuilder::new()
            .delimiter(delimiter)
            .flexible(true)
            .trim(csv::Trim::All)
            .from_reader(text.as_bytes());
        let head_span = Span::new(source, 0..head.trim_end().len());
        let mut csv = Csv { source, text, delimiter, heads: Vec::new(), head_span, rows: Vec::new() };
        let read = reader.headers().map(|heads| heads.iter().map(str::to_owned).collect());
        match read {
            Ok(heads) => csv.heads = heads,
            Err(error) => {
                faults.push(Fault::error(head_span, format!("not CSV: {error}")));
                return None;
            }
        }
        for row in reader.records() {
            match row {
                Ok(row) if row.iter().all(str::is_empty) => {}
                Ok(row) => csv.rows.push(row),
                Err(error) => {
                    let start = error.position().map_or(0, |position| position.byte() as usize);
                    faults.push(Fault::error(Span::new(source, start..start), format!("not CSV: {error}")));
                    return None;
                }
            }
        }
        if csv.rows.len() < 2 {
            faults.push(
                Fault::error(
                    head_span,
                    format!("a series needs a head row and at least two rows, not {}", csv.rows.len()),
                )
                .label("too few rows")
                .also(wanted.file.span, "read for this"),
            );
            return None;
        }
        Some(csv)
    }

    fn column(&self, wanted: &SeriesFile, faults: &mut Faults) -> Option<Series> {
        let times = self.time_column(wanted, faults);
        let values = self.value_column(&wanted.column, faults);
        let ((time_column, clock), (value_column, unit)) = (times?, values?);

        let mut told = Told::default();
        let (mut times_s, mut values) = (Vec::new(), Vec::new());
        let mut first_stamp = None;
        for row in &self.rows {
            let time = row.get(time_column).unwrap_or("");
            let time = match clock {
                Clock::Unit(unit) => number(time).map(|number| number * unit.factor),
                Clock::Stamps => stamp_s(time)
                    .map(|stamp| {
                        let first = *first_stamp.get_or_insert(stamp);
                        (stamp - first) as f64 / 1e9
                    })
                    .ok_or_else(|| "no ISO 8601 date and time, as in 2031-01-05T18:00".into()),
            };
            let time_s = match time {
                Ok(time_s) => time_s,
                Err(why) => {
                    told.push(faults, || {
                        Fault::error(
                            self.field(row, time_column),
                            format!("no time in column `{}`", self.heads[time_column]),
                        )
                        .label(why)
                    });
                    continue;
                }
            };
            if let Some(&before) = times_s.last()
                && time_s <= before
            {
                told.push(faults, || {
                    Fault::error(self.field(row, time_column), "times must ascend from row to row")
                        .label("not after the row before")
                        .help("sort the rows, and keep one row for each time (a clock set back doubles an hour)")
                });
                continue;
            }
            times_s.push(time_s);
            match number(row.get(value_column).unwrap_or("")) {
                Ok(number) => {
                    let kelvin = (number + unit.offset) * unit.factor;
                    let (low, high) = Kind::Temperature.plausible();
                    if !(low..=high).contains(&kelvin) {
                        told.push(faults, || {
                            Fault::error(self.field(row, value_column), "a temperature out of any physical range")
                                .label(format!("{number} {}", unit.spelling))
                        });
                    }
                    values.push(kelvin);
                }
                Err(why) => told.push(faults, || {
                    Fault::error(
                        self.field(row, value_column),
                        format!("no value in column `{}`", self.heads[value_column]),
                    )
                    .label(why)
                    .help("fill the gap, or take the row out: values are joined by straight lines")
                }),
            }
        }
        if told.count > MOST_FAULTS {
            faults.push(
                Fault::error(self.head_span, format!("{} more rows are faulty", told.count - MOST_FAULTS))
                    .label("in this file"),
            );
        }
        if told.count > 0 {
            return None;
        }
        if times_s[0] > 0.0 {
            faults.push(
                Fault::warning(self.field(&self.rows[0], time_column), "the series starts after 0 h")
                    .label("its first value stands for the time before"),
            );
        }
        let source = format!("{}, column {}", wanted.file.value, wanted.column.value);
        Some(Series::Table { times_s, values, source })
    }

    fn time_column(&self, wanted: &SeriesFile, faults: &mut Faults) -> Option<(usize, Clock)> {
        let clock = |head: &str| match unit_of_head(head, Kind::Time) {
            Some(unit) => Clock::Unit(unit),
            None => Clock::Stamps,
        };
        if let Some(name) = &wanted.time {
            let column = self.find(name, faults)?;
            return Some((column, clock(&self.heads[column])));
        }
        let is_time = |head: &str| {
            let head = head.to_lowercase();
            head == "time" || (head.starts_with("time") && unit_of_head(&head, Kind::Time).is_some())
        };
        let found: Vec<_> = (0..self.heads.len()).filter(|&column| is_time(&self.heads[column])).collect();
        match found.as_slice() {
            [column] => Some((*column, clock(&self.heads[*column]))),
            [] => {
                faults.push(
                    Fault::error(self.head_span, "the file has no column of times")
                        .label("no head names a time")
                        .note("accepted: time_s, time_min, time_h, time_d, or `time` with ISO 8601 stamps")
                        .help("rename the head, or name the column in the case: time = \"...\""),
                );
                None
            }
            _ => {
                faults.push(
                    Fault::error(self.head_span, "the file has several columns of times")
                        .label("which one?")
                        .help("name it in the case: { file = \"...\", column = \"...\", time = \"...\" }"),
                );
                None
            }
        }
    }

    fn value_column(&self, name: &Located<String>, faults: &mut Faults) -> Option<(usize, &'static Unit)> {
        let column = self.find(name, faults)?;
        let unit = unit_of_head(&self.heads[column], Kind::Temperature);
        if unit.is_none() {
            faults.push(
                Fault::error(
                    name.span,
                    format!("the head {} does not end in a unit of temperature", quoted(&name.value)),
                )
                .label("which unit?")
                .note(format!("accepted: {}", accepted(Kind::Temperature)))
                .help("rename the head in the file and here, as in air_degC"),
            );
        }
        Some((column, unit?))
    }

    fn find(&self, name: &Located<String>, faults: &mut Faults) -> Option<usize> {
        let found = self.heads.iter().position(|head| *head == name.value);
        if found.is_none() {
            let near = nearest(&name.value, self.heads.iter().map(String::as_str));
            faults.push(
                Fault::error(name.span, format!("the file has no column {}", quoted(&name.value)))
                    .label("no such head")
                    .note(format!("its columns: {}", self.heads.join(", ")))
                    .help_if(near.map(|near| format!("did you mean `{near}`?"))),
            );
        }
        found
    }

    /// Where a field of a row stands in the text; the end of the row where it has none.
    fn field(&self, row: &csv::StringRecord, column: usize) -> Span {
        let mut start = row.position().map_or(0, |position| position.byte() as usize).min(self.text.len());
        // The reader counts line ends before a row as part of it.
        start += self.text.as_bytes()[start..].iter().take_while(|byte| b"\r\n".contains(byte)).count();
        let (mut at, mut is_quoted) = (0, false);
        let mut end = self.text.len();
        for (offset, byte) in self.text.bytes().enumerate().skip(start) {
            match byte {
                b'"' => is_quoted = !is_quoted,
                b'\r' | b'\n' if !is_quoted => {
                    end = offset;
                    break;
                }
                byte if byte == self.delimiter && !is_quoted => {
                    if at == column {
                        end = offset;
                        break;
                    }
                    at += 1;
                    start = offset + 1;
                }
                _ => {}
            }
        }
        let start = if at < column { end } else { start };
        let text = &self.text[start..end];
        let leading = text.len() - text.trim_start().len();
        Span::new(self.source, start + leading..start + leading + text.trim().len())
    }
}

/// How the column of times counts.
#[derive(Clone, Copy)]
enum Clock {
    Unit(&'static Unit),
    Stamps,
}

/// Tells the first faults, counts the rest.
#[derive(Default)]
struct Told {
    count: usize,
}

impl Told {
    fn push(&mut self, faults: &mut Faults, fault: impl FnOnce() -> Fault) {
        self.count += 1;
        if self.count <= MOST_FAULTS {
            faults.push(fault());
        }
    }
}

/// The unit that a head ends in: `air_degC`, `Dry-bulb (C)`.
fn unit_of_head(head: &str, kind: Kind) -> Option<&'static Unit> {
    let in_brackets = head.trim_end().strip_suffix([')', ']']).and_then(|head| head.rsplit(['(', '[']).next());
    find_unit(kind, in_brackets.or_else(|| head.rsplit_once('_').map(|(_, unit)| unit))?)
}

fn number(field: &str) -> Result<f64, String> {
    if field.is_empty() {
        return Err("empty".into());
    }
    match field.replace('\u{2212}', "-").parse::<f64>() {
        Ok(number) if number.is_finite() => Ok(number),
        _ if field.contains(',') => Err("numbers take a decimal point".into()),
        _ => Err("no number".into()),
    }
}

/// Nanoseconds of an ISO 8601 stamp, with or without an offset from UTC.
fn stamp_s(field: &str) -> Option<i128> {
    if let Ok(stamp) = field.parse::<jiff::Timestamp>() {
        return Some(stamp.as_nanosecond());
    }
    let local: jiff::civil::DateTime = field.parse().ok()?;
    Some(jiff::tz::Offset::UTC.to_timestamp(local).ok()?.as_nanosecond())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn read(text: &str, column: &str) -> Result<Series, String> {
        let folder = tempfile::tempdir().unwrap();
        std::fs::write(folder.path().join("air.csv"), text).unwrap();
        let mut faults = Faults::default();
        let case = faults.add_source("case", format!("air.csv {column}"));
        let wanted = SeriesFile {
            file: Located { value: "air.csv".into(), span: Span::new(case, 0..7) },
            column: Located { value: column.into(), span: Span::new(case, 8..8 + column.len()) },
            time: None,
        };
        let mut files = SeriesFiles::new(folder.path());
        let series = files.temperature(&wanted, &mut faults);
        series.ok_or_else(|| faults.to_string())
    }

    fn table(series: Series) -> (Vec<f64>, Vec<f64>) {
        let Series::Table { times_s, values, .. } = series else { panic!("a constant") };
        (times_s, values)
    }

    #[test]
    fn times_and_temperatures_come_in_the_units_of_their_heads() {
        let expected = (vec![0.0, 5400.0], vec![268.15, 255.372_222_222_222_23]);
        for (text, column) in [
            ("time_h,air_degC\n0,-5\n1.5,-17.77777777777778\n", "air_degC"),
            ("time_min;wind;air_degF\r\n0;1;23\r\n90;2;0\r\n", "air_degF"),
            ("time\tair_K\n2031-01-05T18:00\t268.15\n2031-01-05 19:30:00\t255.37222222222223\n", "air_K"),
            ("time,Dry-bulb (F)\n2031-01-05T18:00+02:00,23\n2031-01-05T17:30Z,0\n", "Dry-bulb (F)"),
        ] {
            let (times, values) = table(read(text, column).unwrap());
            assert_eq!(times, expected.0, "{text}");
            for (value, expected) in values.iter().zip(&expected.1) {
                assert!((value - expected).abs() < 1e-9, "{text}: {value}");
            }
        }
    }

    #[test]
    fn a_fault_points_at_its_field() {
        let told = read("time_h,air_degC,note\n0,-5,\"a,b\"\n\n1,,x\n", "air_degC").unwrap_err();
        assert!(told.contains("air.csv:4:3"), "{told}");
        let told = read("time_h,note,air_degC\n0,\"a,b\",-5\n1,\"a,b\",warm\n", "air_degC").unwrap_err();
        assert!(told.contains("air.csv:3:9") && told.contains("no number"), "{told}");
        let told = read("time_h,air_degC\n2,-5\n1,-6\n", "air_degC").unwrap_err();
        assert!(told.contains("air.csv:3:1") && told.contains("ascend"), "{told}");
    }
}
