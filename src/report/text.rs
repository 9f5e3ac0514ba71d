//! Names and numbers made safe and readable for every kind of output.

/// Kelvin of 0 degC.
pub const ZERO_DEGC_K: f64 = 273.15;

/// A name without characters that steer a terminal, a page or the direction of writing: each becomes `□`, which the bundled font has.
///
/// Markup is not touched here: every writer escapes for its own format.
pub fn clean(name: &str) -> String {
    name.chars().map(|character| if steers(character) { '□' } else { character }).collect()
}

/// A name for a figure, where room is short: no more than 28 characters, an ellipsis for the rest.
pub fn label(name: &str) -> String {
    const MOST: usize = 28;
    let name = clean(name);
    if name.chars().count() <= MOST {
        return name;
    }
    let short: String = name.chars().take(MOST - 1).collect();
    format!("{}…", short.trim_end())
}

/// Control characters (line ends and tabs too), marks that reverse or isolate the direction of writing, invisible ones.
fn steers(character: char) -> bool {
    character.is_control()
        || matches!(character, '\u{200B}'..='\u{200F}' | '\u{2028}'..='\u{202E}' | '\u{2060}'..='\u{2069}' | '\u{FEFF}')
}

/// A column's head that no spreadsheet takes for a formula: one that begins like a formula gets an apostrophe.
pub fn column_head(name: &str) -> String {
    let name = clean(name);
    if name.starts_with(['=', '+', '-', '@']) { format!("'{name}") } else { name }
}

/// A number as short as it can be without losing any of its first 12 figures; empty where it is not finite.
pub fn number(value: f64) -> String {
    if !value.is_finite() {
        return String::new();
    }
    let rounded: f64 = format!("{value:.11e}").parse().expect("a formatted number reads back");
    if rounded == 0.0 { "0".into() } else { rounded.to_string() }
}

/// A temperature in degC from kelvin, free of the last bits that the subtraction of 273.15 leaves behind.
pub fn degc(temperature_k: f64) -> f64 {
    let rounded = ((temperature_k - ZERO_DEGC_K) * 1e9).round() / 1e9;
    if rounded == 0.0 { 0.0 } else { rounded }
}

/// A number for people: so many figures, no exponent, no trailing zeros, a real minus sign.
pub fn figures(value: f64, significant: usize) -> String {
    if !value.is_finite() {
        return "–".into();
    }
    if value == 0.0 {
        return "0".into();
    }
    let magnitude = value.abs().log10().floor() as i32;
    let decimals = (significant as i32 - 1 - magnitude).clamp(0, 12) as usize;
    fixed(value, decimals)
}

/// A number for people with at most so many decimals, no trailing zeros, a real minus sign.
pub fn fixed(value: f64, decimals: usize) -> String {
    let mut text = aligned(value, decimals);
    if text.contains('.') {
        text.truncate(text.trim_end_matches('0').trim_end_matches('.').len());
    }
    text
}

/// A number for a column: just so many decimals, a real minus sign, and none before a zero.
pub fn aligned(value: f64, decimals: usize) -> String {
    if !value.is_finite() {
        return "–".into();
    }
    let text = format!("{value:.decimals$}");
    match text.strip_prefix('-') {
        Some(digits) if digits.chars().all(|digit| matches!(digit, '0' | '.')) => digits.into(),
        Some(digits) => format!("\u{2212}{digits}"),
        None => text,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_are_short_and_keep_twelve_figures() {
        assert_eq!(number(0.1 + 0.2), "0.3");
        assert_eq!(number(1.0 / 3.0), "0.333333333333");
        assert_eq!(number(123456789.123), "123456789.123");
        assert_eq!(number(-0.0), "0");
        assert_eq!(number(f64::NAN), "");
        assert_eq!(number(f64::INFINITY), "");
    }

    #[test]
    fn celsius_is_exact_where_the_case_was() {
        assert_eq!(degc(273.15 + 7.1), 7.1);
        assert_eq!(degc(273.15), 0.0);
        assert!(degc(f64::NAN).is_nan());
    }

    #[test]
    fn heads_are_no_formulas_and_names_steer_nothing() {
        assert_eq!(column_head("=1+1"), "'=1+1");
        assert_eq!(column_head("@sum"), "'@sum");
        assert_eq!(column_head("mid lagging"), "mid lagging");
        assert_eq!(clean("a\u{1b}[31mb\u{202e}c\nd"), "a□[31mb□c□d");
    }

    #[test]
    fn people_read_figures() {
        assert_eq!(figures(12345.678, 3), "12346");
        assert_eq!(figures(0.012345, 3), "0.0123");
        assert_eq!(figures(-25.0, 3), "\u{2212}25");
        assert_eq!(fixed(-0.001, 1), "0");
        assert_eq!(aligned(-0.001, 2), "0.00");
        assert_eq!(aligned(-24.1, 2), "\u{2212}24.10");
    }
}
