//! Quantities in text: a number and its unit, SI or US customary, turned into SI.
//!
//! [`UNITS`] is the one table of accepted units. A quantity's spelling is normalised (superscripts, middle dots,
//! brackets, order of factors, `Btu`, `hr`, `°F`) and then looked up for the one [`Kind`] that the place asks for, so
//! that a length is never taken for a time. Temperatures and differences of temperature are two kinds: `10 degF` is
//! 260.9 K as the one and 5.6 K as the other.
//!
//! Conversion factors are exact: foot and pound by the international agreement of 1959, the International Table BTU
//! (NIST Special Publication 811, appendix B; figures from memory).

use std::fmt;
use std::ops::Range;

const FOOT_M: f64 = 0.3048;
const INCH_M: f64 = 0.0254;
const POUND_KG: f64 = 0.453_592_37;
const BTU_J: f64 = 1_055.055_852_62;
const FAHRENHEIT_K: f64 = 5.0 / 9.0;
const HOUR_S: f64 = 3600.0;
const BTU_PER_HOUR_W: f64 = BTU_J / HOUR_S;

/// What a contact between layers may be stated as.
pub const CONTACT: &[Kind] = &[Kind::Film, Kind::Resistance];

/// What a quantity is.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Kind {
    /// Length [m].
    Length,
    /// Temperature [K].
    Temperature,
    /// Difference of temperatures [K].
    TemperatureDifference,
    /// Time [s].
    Time,
    /// Output per length of heater [W/m].
    Output,
    /// Film coefficient or contact conductance [W/(m2 K)].
    Film,
    /// Thermal resistance of a metre of line [m K/W].
    Resistance,
    /// Thermal conductivity [W/(m K)].
    Conductivity,
    /// Density [kg/m3].
    Density,
    /// Specific heat [J/(kg K)].
    SpecificHeat,
    /// Latent heat [J/kg].
    LatentHeat,
    /// Power [W].
    Power,
    /// Share of a whole [-].
    Share,
    /// A plain number [-].
    Number,
}

impl Kind {
    /// What it is called in a message, without an article.
    pub fn name(self) -> &'static str {
        match self {
            Kind::Length => "length",
            Kind::Temperature => "temperature",
            Kind::TemperatureDifference => "temperature difference",
            Kind::Time => "time",
            Kind::Output => "heater output per length",
            Kind::Film => "film coefficient",
            Kind::Resistance => "resistance of a length of line",
            Kind::Conductivity => "conductivity",
            Kind::Density => "density",
            Kind::SpecificHeat => "specific heat",
            Kind::LatentHeat => "latent heat",
            Kind::Power => "power",
            Kind::Share => "share",
            Kind::Number => "plain number",
        }
    }

    /// What any of several kinds is called in a message, without an article.
    pub fn name_of_any(kinds: &[Kind]) -> String {
        if kinds == CONTACT {
            return "contact".into();
        }
        kinds.iter().map(|kind| kind.name()).collect::<Vec<_>>().join(" or ")
    }

    /// A quantity of this kind as it is written, for hints.
    pub fn example(self) -> &'static str {
        match self {
            Kind::Length => "50 mm",
            Kind::Temperature => "-25 degC",
            Kind::TemperatureDifference => "3 K",
            Kind::Time => "36 h",
            Kind::Output => "20 W/m",
            Kind::Film => "18 W/(m2 K)",
            Kind::Resistance => "0.009 m K/W",
            Kind::Conductivity => "0.04 W/(m K)",
            Kind::Density => "1000 kg/m3",
            Kind::SpecificHeat => "4.2 kJ/(kg K)",
            Kind::LatentHeat => "334 kJ/kg",
            Kind::Power => "1.5 kW",
            Kind::Share => "10 %",
            Kind::Number => "2",
        }
    }

    /// Lowest and highest value that can be meant, in SI: beyond them a unit or a digit is wrong.
    ///
    /// Wide on purpose (common practice, no source): from a cryogenic line to molten metal, from a capillary to a tunnel.
    pub fn plausible(self) -> (f64, f64) {
        match self {
            Kind::Length => (0.0, 1e6),
            Kind::Temperature => (1.0, 4000.0),
            Kind::TemperatureDifference => (0.0, 4000.0),
            Kind::Time => (0.0, 100.0 * 366.0 * 24.0 * HOUR_S),
            Kind::Output => (0.0, 1e6),
            Kind::Film => (0.0, 1e9),
            Kind::Resistance => (0.0, 1e6),
            Kind::Conductivity => (0.0, 1e5),
            Kind::Density => (0.0, 1e5),
            Kind::SpecificHeat => (0.0, 1e6),
            Kind::LatentHeat => (0.0, 1e8),
            Kind::Power => (0.0, 1e12),
            Kind::Share => (0.0, 1.0),
            Kind::Number => (f64::MIN, f64::MAX),
        }
    }
}

/// One accepted unit: `SI value = (value + offset) * factor`.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Unit {
    /// What it measures.
    pub kind: Kind,
    /// How it is written in messages and documents.
    pub spelling: &'static str,
    /// Added to the number first (temperatures only).
    pub offset: f64,
    /// Multiplies the number.
    pub factor: f64,
}

const fn unit(kind: Kind, spelling: &'static str, factor: f64) -> Unit {
    Unit { kind, spelling, offset: 0.0, factor }
}

/// Every accepted unit, in the order in which messages list them.
pub const UNITS: &[Unit] = &[
    unit(Kind::Length, "mm", 1e-3),
    unit(Kind::Length, "cm", 1e-2),
    unit(Kind::Length, "m", 1.0),
    unit(Kind::Length, "km", 1e3),
    unit(Kind::Length, "in", INCH_M),
    unit(Kind::Length, "ft", FOOT_M),
    Unit { kind: Kind::Temperature, spelling: "degC", offset: 273.15, factor: 1.0 },
    Unit { kind: Kind::Temperature, spelling: "degF", offset: 459.67, factor: FAHRENHEIT_K },
    unit(Kind::Temperature, "K", 1.0),
    unit(Kind::TemperatureDifference, "K", 1.0),
    unit(Kind::TemperatureDifference, "degC", 1.0),
    unit(Kind::TemperatureDifference, "degF", FAHRENHEIT_K),
    unit(Kind::Time, "s", 1.0),
    unit(Kind::Time, "min", 60.0),
    unit(Kind::Time, "h", HOUR_S),
    unit(Kind::Time, "d", 24.0 * HOUR_S),
    unit(Kind::Output, "W/m", 1.0),
    unit(Kind::Output, "kW/m", 1e3),
    unit(Kind::Output, "W/ft", 1.0 / FOOT_M),
    unit(Kind::Output, "BTU/(h ft)", BTU_PER_HOUR_W / FOOT_M),
    unit(Kind::Film, "W/(m2 K)", 1.0),
    unit(Kind::Film, "W/(m2 degC)", 1.0),
    unit(Kind::Film, "kW/(m2 K)", 1e3),
    unit(Kind::Film, "BTU/(h ft2 degF)", BTU_PER_HOUR_W / (FOOT_M * FOOT_M * FAHRENHEIT_K)),
    unit(Kind::Resistance, "m K/W", 1.0),
    unit(Kind::Resistance, "m degC/W", 1.0),
    unit(Kind::Resistance, "h ft degF/BTU", FOOT_M * FAHRENHEIT_K / BTU_PER_HOUR_W),
    unit(Kind::Conductivity, "W/(m K)", 1.0),
    unit(Kind::Conductivity, "W/(m degC)", 1.0),
    unit(Kind::Conductivity, "mW/(m K)", 1e-3),
    unit(Kind::Conductivity, "BTU in/(h ft2 degF)", BTU_PER_HOUR_W * INCH_M / (FOOT_M * FOOT_M * FAHRENHEIT_K)),
    unit(Kind::Conductivity, "BTU/(h ft degF)", BTU_PER_HOUR_W / (FOOT_M * FAHRENHEIT_K)),
    unit(Kind::Density, "kg/m3", 1.0),
    unit(Kind::Density, "g/cm3", 1e3),
    unit(Kind::Density, "kg/L", 1e3),
    unit(Kind::Density, "lb/ft3", POUND_KG / (FOOT_M * FOOT_M * FOOT_M)),
    unit(Kind::SpecificHeat, "J/(kg K)", 1.0),
    unit(Kind::SpecificHeat, "J/(kg degC)", 1.0),
    unit(Kind::SpecificHeat, "kJ/(kg K)", 1e3),
    unit(Kind::SpecificHeat, "kJ/(kg degC)", 1e3),
    unit(Kind::SpecificHeat, "BTU/(lb degF)", BTU_J / (POUND_KG * FAHRENHEIT_K)),
    unit(Kind::LatentHeat, "J/kg", 1.0),
    unit(Kind::LatentHeat, "kJ/kg", 1e3),
    unit(Kind::LatentHeat, "MJ/kg", 1e6),
    unit(Kind::LatentHeat, "BTU/lb", BTU_J / POUND_KG),
    unit(Kind::Power, "W", 1.0),
    unit(Kind::Power, "kW", 1e3),
    unit(Kind::Power, "BTU/h", BTU_PER_HOUR_W),
    unit(Kind::Share, "%", 0.01),
];

/// Symbols that units are made of, each with other spellings of it.
const SYMBOLS: &[(&str, &[&str])] = &[
    ("mm", &["millimetre", "millimetres", "millimeter", "millimeters"]),
    ("cm", &["centimetre", "centimetres", "centimeter", "centimeters"]),
    ("km", &[]),
    ("m", &["metre", "metres", "meter", "meters"]),
    ("in", &["inch", "inches", "\""]),
    ("ft", &["foot", "feet", "'"]),
    ("degC", &["C", "celsius"]),
    ("degF", &["F", "fahrenheit"]),
    ("K", &["degK", "kelvin"]),
    ("s", &["sec", "second", "seconds"]),
    ("min", &["mins", "minute", "minutes"]),
    ("h", &["hr", "hrs", "hour", "hours"]),
    ("d", &["day", "days"]),
    ("kW", &[]),
    ("mW", &[]),
    ("W", &["watt", "watts"]),
    ("BTU", &["Btu"]),
    ("MJ", &[]),
    ("kJ", &[]),
    ("J", &["joule", "joules"]),
    ("kg", &[]),
    ("g", &[]),
    ("lb", &["lbs", "lbm"]),
    ("L", &["l", "litre", "liter"]),
    ("%", &["percent", "pct"]),
];

/// What is wrong with a quantity's text; `part` is the range of bytes in the text to point at.
#[derive(Debug, Clone, PartialEq)]
pub struct QuantityFault {
    /// The quantity that was asked for (all kinds that the place accepts).
    pub wanted: Vec<Kind>,
    /// What is wrong.
    pub reason: Reason,
    /// Where in the text.
    pub part: Range<usize>,
}

/// Why a text is no quantity.
#[derive(Debug, Clone, PartialEq)]
pub enum Reason {
    /// There is no text.
    Empty,
    /// It does not start with a number.
    NoNumber,
    /// A comma in a number; with the text as it should be written.
    Comma(String),
    /// The number cannot be held.
    TooLarge,
    /// A number alone.
    NoUnit,
    /// A unit of something else.
    OtherKind(String, Kind),
    /// A unit that nobody knows.
    UnknownUnit(String),
    /// A unit where a plain number is wanted.
    UnitOfNumber(String),
}

impl QuantityFault {
    /// Units that the place accepts, in one line.
    pub fn accepted(&self) -> String {
        self.wanted.iter().map(|&kind| accepted(kind)).collect::<Vec<_>>().join(", ")
    }

    /// The unit spelt most like the one given, if one is.
    pub fn nearest(&self) -> Option<&'static str> {
        let Reason::UnknownUnit(given) = &self.reason else { return None };
        let spellings = UNITS.iter().filter(|unit| self.wanted.contains(&unit.kind)).map(|unit| unit.spelling);
        spellings
            .map(|spelling| (strsim::damerau_levenshtein(spelling, given), spelling))
            .filter(|(distance, spelling)| *distance <= 1.max(spelling.len() / 3))
            .min_by_key(|(distance, _)| *distance)
            .map(|(_, spelling)| spelling)
    }

    /// A few words to stand under the text.
    pub fn label(&self) -> String {
        match &self.reason {
            Reason::Empty => "empty".into(),
            Reason::NoNumber => "no number here".into(),
            Reason::Comma(_) => "a comma in the number".into(),
            Reason::TooLarge => "too large".into(),
            Reason::NoUnit => "a number without its unit".into(),
            Reason::OtherKind(_, kind) => format!("a unit of {}", kind.name()),
            Reason::UnknownUnit(_) => "unknown unit".into(),
            Reason::UnitOfNumber(_) => "no unit belongs here".into(),
        }
    }

    /// The remedy.
    pub fn help(&self) -> Option<String> {
        let example = self.wanted.first().map_or("20 W/m", |kind| kind.example());
        match &self.reason {
            Reason::Empty | Reason::NoNumber | Reason::NoUnit => {
                Some(format!("write a number and its unit, as in \"{example}\""))
            }
            Reason::Comma(repaired) => {
                Some(format!("numbers take a decimal point and no thousands separator: \"{repaired}\""))
            }
            Reason::UnknownUnit(_) => self.nearest().map(|nearest| format!("did you mean `{nearest}`?")),
            Reason::UnitOfNumber(_) => Some(format!("write the number alone, as in {example}")),
            Reason::OtherKind(..) => Some(format!("as in \"{example}\"")),
            Reason::TooLarge => None,
        }
    }
}

impl fmt::Display for QuantityFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let wanted = Kind::name_of_any(&self.wanted);
        match &self.reason {
            Reason::Empty => write!(f, "a {wanted} is missing"),
            Reason::NoNumber => write!(f, "a {wanted} starts with a number"),
            Reason::Comma(_) => write!(f, "a decimal comma in a {wanted}"),
            Reason::TooLarge => write!(f, "the number of a {wanted} is too large to hold"),
            Reason::NoUnit => write!(f, "a {wanted} needs its unit"),
            Reason::OtherKind(unit, kind) => write!(f, "`{unit}` is a unit of {}, not of {wanted}", kind.name()),
            Reason::UnknownUnit(unit) => write!(f, "`{unit}` is not a known unit of {wanted}"),
            Reason::UnitOfNumber(unit) => write!(f, "a {wanted} has no unit, not even `{unit}`"),
        }
    }
}

/// The accepted units of a kind, in one line.
pub fn accepted(kind: Kind) -> String {
    let spellings: Vec<_> = UNITS.iter().filter(|unit| unit.kind == kind).map(|unit| unit.spelling).collect();
    if spellings.is_empty() { "a number without unit".into() } else { spellings.join(", ") }
}

/// Reads a quantity of one kind; the value is in SI.
///
/// # Errors
/// What is wrong, where in the text, and what is accepted.
pub fn parse(kind: Kind, text: &str) -> Result<f64, QuantityFault> {
    parse_any(&[kind], text).map(|(_, value)| value)
}

/// Reads a quantity that may be of several kinds; tells which it was.
///
/// # Errors
/// What is wrong, where in the text, and what is accepted.
pub fn parse_any(wanted: &[Kind], text: &str) -> Result<(Kind, f64), QuantityFault> {
    let fault = |reason, part| Err(QuantityFault { wanted: wanted.to_vec(), reason, part });
    let start = text.len() - text.trim_start().len();
    let end = text.trim_end().len();
    if start >= end {
        return fault(Reason::Empty, 0..text.len());
    }
    let Some((number, length)) = leading_number(&text[start..end]) else {
        return fault(Reason::NoNumber, start..end);
    };
    let after_number = start + length;
    let rest = &text[after_number..end];
    if rest.starts_with(',') && rest[1..].starts_with(|c: char| c.is_ascii_digit()) {
        let digits = rest[1..].find(|c: char| !c.is_ascii_digit()).unwrap_or(rest.len() - 1);
        let repaired = format!("{}.{}", &text[start..after_number], &rest[1..]);
        return fault(Reason::Comma(repaired), start..after_number + 1 + digits);
    }
    if !number.is_finite() {
        return fault(Reason::TooLarge, start..after_number);
    }
    let unit_start = end - rest.trim_start().len();
    let spelling = &text[unit_start..end];
    if spelling.is_empty() {
        if wanted.contains(&Kind::Number) {
            return Ok((Kind::Number, number));
        }
        return fault(Reason::NoUnit, start..end);
    }
    let units = find(spelling);
    if let Some(unit) = wanted.iter().find_map(|kind| units.iter().find(|unit| unit.kind == *kind)) {
        return Ok((unit.kind, (number + unit.offset) * unit.factor));
    }
    let reason = match units.first() {
        _ if wanted == [Kind::Number] => Reason::UnitOfNumber(spelling.into()),
        Some(unit) => Reason::OtherKind(spelling.into(), unit.kind),
        None => Reason::UnknownUnit(spelling.into()),
    };
    fault(reason, unit_start..end)
}

/// Finds a unit of one kind by any of its spellings.
pub fn find_unit(kind: Kind, spelling: &str) -> Option<&'static Unit> {
    find(spelling).into_iter().find(|unit| unit.kind == kind)
}

/// Every unit that a spelling stands for, of whatever kind.
fn find(spelling: &str) -> Vec<&'static Unit> {
    let Some(key) = normalise(spelling) else { return Vec::new() };
    UNITS.iter().filter(|unit| normalise(unit.spelling).as_ref() == Some(&key)).collect()
}

/// The number that a text starts with (`-2.5e3`, `1/2`, `1 1/2`, `1-1/2`), and how many bytes it takes.
fn leading_number(text: &str) -> Option<(f64, usize)> {
    let sign_length = text.chars().next().filter(|c| "+-\u{2212}\u{2013}".contains(*c)).map_or(0, char::len_utf8);
    let sign = if sign_length == 0 || text.starts_with('+') { 1.0 } else { -1.0 };
    let body = &text[sign_length..];
    let digits = |text: &str| text.len() - text.trim_start_matches(|c: char| c.is_ascii_digit()).len();
    let mut length = digits(body);
    let whole_only = length;
    if body[length..].starts_with('.') {
        length += 1 + digits(&body[length + 1..]);
    }
    if length == 0 || &body[..length] == "." {
        return None;
    }
    if body[length..].starts_with(['e', 'E']) {
        let mark = length + 1;
        let sign = usize::from(body[mark..].starts_with(['+', '-']));
        let exponent = digits(&body[mark + sign..]);
        if exponent > 0 {
            length = mark + sign + exponent;
        }
    }
    let mut value: f64 = body[..length].parse().ok()?;
    // Vulgar fractions, as inches are written.
    if length == whole_only {
        let fraction = |text: &str| -> Option<(f64, usize)> {
            let above = digits(text);
            let slash = text[above..].strip_prefix('/')?;
            let below = digits(slash);
            if above == 0 || below == 0 {
                return None;
            }
            let value: f64 = text[..above].parse::<f64>().ok()? / slash[..below].parse::<f64>().ok()?;
            Some((value, above + 1 + below))
        };
        if let Some((half, taken)) = fraction(body) {
            (value, length) = (half, taken);
        } else {
            let gap = body[length..].len() - body[length..].trim_start_matches([' ', '-']).len();
            if gap > 0
                && let Some((half, taken)) = fraction(&body[length + gap..])
            {
                value += half;
                length += gap + taken;
            }
        }
    }
    Some((sign * value, sign_length + length))
}

/// A spelling taken apart into its factors, above and below the line, each in alphabetical order.
fn normalise(spelling: &str) -> Option<(Vec<String>, Vec<String>)> {
    let mut plain = String::with_capacity(spelling.len() + 4);
    for letter in spelling.trim().chars() {
        match letter {
            '²' => plain.push('2'),
            '³' => plain.push('3'),
            '¹' => plain.push('1'),
            '⁻' | '\u{2212}' => plain.push('-'),
            '°' | 'º' | '˚' => plain.push_str("deg"),
            '℃' => plain.push_str("degC"),
            '℉' => plain.push_str("degF"),
            '\u{212a}' => plain.push('K'),
            '″' | '”' => plain.push('"'),
            '′' | '’' => plain.push('\''),
            '·' | '⋅' | '∙' | '•' | '×' | '*' | '\u{a0}' | '\u{202f}' | '\u{2009}' => plain.push(' '),
            '^' => {}
            other => plain.push(other),
        }
    }
    for (words, symbol) in [("deg ", "deg"), ("deg. ", "deg"), ("sq ft", "ft2"), ("sq.ft", "ft2"), ("cu ft", "ft3")] {
        plain = plain.replace(words, symbol);
    }

    let (mut above, mut below) = (Vec::new(), Vec::new());
    let mut rest = plain.as_str();
    let mut is_below = false;
    while let Some(letter) = rest.chars().next() {
        if letter == '/' {
            is_below = true;
            rest = &rest[1..];
        } else if letter.is_whitespace() || "().-".contains(letter) {
            rest = &rest[letter.len_utf8()..];
        } else {
            let (symbol, length) = leading_symbol(rest)?;
            rest = &rest[length..];
            let is_inverse = rest.starts_with('-');
            let exponent = rest[usize::from(is_inverse)..].chars().next().filter(char::is_ascii_digit);
            rest = match exponent {
                Some(_) => &rest[usize::from(is_inverse) + 1..],
                None => rest,
            };
            let power = exponent.filter(|&digit| digit != '1').map_or(String::new(), String::from);
            let side = if is_below != (is_inverse && exponent.is_some()) { &mut below } else { &mut above };
            side.push(format!("{symbol}{power}"));
        }
    }
    above.sort_unstable();
    below.sort_unstable();
    (!above.is_empty()).then_some((above, below))
}

/// The longest symbol that a text starts with; letters' case counts only where it decides.
fn leading_symbol(text: &str) -> Option<(&'static str, usize)> {
    let longest = |matches: fn(&str, &str) -> bool| {
        SYMBOLS
            .iter()
            .flat_map(|(symbol, others)| {
                std::iter::once(*symbol).chain(others.iter().copied()).map(move |spelling| (*symbol, spelling))
            })
            .filter(|(_, spelling)| text.get(..spelling.len()).is_some_and(|head| matches(head, spelling)))
            .map(|(symbol, spelling)| (symbol, spelling.len()))
            .max_by_key(|(_, length)| *length)
    };
    longest(|head, spelling| head == spelling).or_else(|| longest(str::eq_ignore_ascii_case))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn close(kind: Kind, text: &str, expected: f64) {
        let value = parse(kind, text).unwrap_or_else(|fault| panic!("{text}: {fault}"));
        assert!((value - expected).abs() <= 1e-12 * expected.abs().max(1.0), "{text}: {value}, not {expected}");
    }

    #[test]
    fn every_unit_reads_itself_and_stands_for_one_thing_within_its_kind() {
        for unit in UNITS {
            let value = parse(unit.kind, &format!("3 {}", unit.spelling)).unwrap();
            assert_eq!(value, (3.0 + unit.offset) * unit.factor, "{}", unit.spelling);
            let same = find(unit.spelling).into_iter().filter(|other| other.kind == unit.kind).count();
            assert_eq!(same, 1, "{}", unit.spelling);
        }
    }

    #[test]
    fn spellings_of_the_trade_are_understood() {
        for film in [
            "400 W/(m2 K)",
            "400 W/m²K",
            "400 W/m2K",
            "400 W/(m^2 K)",
            "400 W/(m²·K)",
            "400 W/m2/K",
            "400W/(K m2)",
            "400 W m-2 K-1",
            "400 W·m⁻²·K⁻¹",
            "400 W/(m2 °C)",
            "0.4 kW/(m2 K)",
            "400 w/m2k",
        ] {
            close(Kind::Film, film, 400.0);
        }
        for temperature in
            ["-25 degC", "-25 °C", "-25°C", "-25 C", "\u{2212}25 deg C", "-13 degF", "-13 °F", "248.15 K"]
        {
            close(Kind::Temperature, temperature, 248.15);
        }
        for length in ["0.0381 m", "38.1 mm", "1.5 in", "1 1/2 in", "1-1/2\"", "3/2 inches", "0.125 ft"] {
            close(Kind::Length, length, 0.0381);
        }
        for time in ["36 h", "36 hr", "36 hours", "1.5 d", "2160 min", "129600 s", "1.296e5 s"] {
            close(Kind::Time, time, 129_600.0);
        }
        close(Kind::TemperatureDifference, "9 degF", 5.0);
        close(Kind::Share, "10%", 0.1);
        close(Kind::Number, "2.5", 2.5);
    }

    /// NIST SP 811 appendix B.8 rounds these to seven digits (from memory): half a unit of the seventh is 5e-7 at most.
    #[test]
    fn customary_units_agree_with_the_published_factors() {
        for (kind, text, published) in [
            (Kind::Conductivity, "1 BTU in/(h ft2 degF)", 0.144_227_9),
            (Kind::Conductivity, "1 Btu·in/(hr·ft²·°F)", 0.144_227_9),
            (Kind::Conductivity, "1 BTU/(h ft F)", 1.730_735),
            (Kind::Film, "1 BTU/(h ft2 degF)", 5.678_263),
            (Kind::Film, "1 BTU/h-ft2-F", 5.678_263),
            (Kind::SpecificHeat, "1 BTU/(lb degF)", 4186.8),
            (Kind::LatentHeat, "1 BTU/lb", 2326.0),
            (Kind::Density, "1 lb/ft3", 16.018_46),
            (Kind::Output, "1 W/ft", 3.280_840),
            (Kind::Power, "1 BTU/h", 0.293_071_1),
        ] {
            let value = parse(kind, text).unwrap_or_else(|fault| panic!("{text}: {fault}"));
            assert!((value / published - 1.0).abs() <= 5e-7, "{text}: {value}, not {published}");
        }
        close(Kind::Resistance, "1 h ft degF/BTU", 1.0 / parse(Kind::Conductivity, "1 BTU/(h ft degF)").unwrap());
    }

    #[test]
    fn faults_say_what_is_wrong_where_and_what_to_write() {
        let fault = |kind, text| parse(kind, text).unwrap_err();
        assert_eq!(fault(Kind::Length, "50").reason, Reason::NoUnit);
        assert_eq!(fault(Kind::Length, "mm").reason, Reason::NoNumber);
        assert_eq!(fault(Kind::Length, " ").reason, Reason::Empty);
        assert_eq!(fault(Kind::Length, "1e999 m").reason, Reason::TooLarge);
        assert_eq!(fault(Kind::Number, "2 m").reason, Reason::UnitOfNumber("m".into()));

        let comma = fault(Kind::Length, "0,6 mm");
        assert_eq!((&comma.reason, comma.part), (&Reason::Comma("0.6 mm".into()), 0..3));

        let wrong = fault(Kind::Length, "50 W/m");
        assert_eq!((&wrong.reason, wrong.part.clone()), (&Reason::OtherKind("W/m".into(), Kind::Output), 3..6));
        assert_eq!(wrong.accepted(), "mm, cm, m, km, in, ft");

        let unknown = fault(Kind::Film, "18 W/(m2 Q)");
        assert_eq!(unknown.nearest(), Some("W/(m2 K)"));
    }
}
