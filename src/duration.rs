//! Durations in the words of a shift, rounded to the safe side.

/// To which side a duration is rounded.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Rounding {
    /// Time left before a danger: never longer than it is.
    Down,
    /// Time that a recovery takes: never shorter than it is.
    Up,
    /// An error or a length that is neither.
    Nearest,
}

impl Rounding {
    fn apply(self, value: f64) -> f64 {
        // A whole number that binary fractions miss by a hair is that number.
        let whole = value.round();
        if (value - whole).abs() < 1e-9 * whole.abs().max(1.0) {
            return whole;
        }
        match self {
            Rounding::Down => value.floor(),
            Rounding::Up => value.ceil(),
            Rounding::Nearest => whole,
        }
    }
}

/// A duration [s] in words, whole units to the side asked: seconds below twenty minutes, minutes below two days, hours
/// beyond, so that from twenty seconds on rounding never takes more than a twentieth.
///
/// ```
/// use stillwarm::duration::{Rounding, words};
/// assert_eq!(words(107.2, Rounding::Down), "107 s");
/// assert_eq!(words(607.2, Rounding::Down), "10 min 7 s");
/// assert_eq!(words(73_271.3, Rounding::Down), "20 h 21 min");
/// assert_eq!(words(73_271.3, Rounding::Up), "20 h 22 min");
/// assert_eq!(words(320_697.0, Rounding::Down), "3 d 17 h");
/// ```
pub fn words(time_s: f64, rounding: Rounding) -> String {
    if !time_s.is_finite() {
        return "an unknown time".into();
    }
    if time_s < 120.0 {
        return format!("{} s", rounding.apply(time_s));
    }
    if time_s < 1200.0 {
        let seconds = rounding.apply(time_s) as u64;
        return match (seconds / 60, seconds % 60) {
            (minutes, 0) => format!("{minutes} min"),
            (minutes, seconds) => format!("{minutes} min {seconds} s"),
        };
    }
    if time_s < 2.0 * 86_400.0 {
        let minutes = rounding.apply(time_s / 60.0) as u64;
        return match (minutes / 60, minutes % 60) {
            (0, minutes) => format!("{minutes} min"),
            (hours, 0) => format!("{hours} h"),
            (hours, minutes) => format!("{hours} h {minutes} min"),
        };
    }
    let hours = rounding.apply(time_s / 3600.0) as u64;
    match (hours / 24, hours % 24) {
        (days, 0) => format!("{days} d"),
        (days, hours) => format!("{days} d {hours} h"),
    }
}

/// An error of a duration [s], in one unit and two figures.
pub fn error_words(error_s: f64) -> String {
    let (value, unit) = if error_s < 120.0 {
        (error_s, "s")
    } else if error_s < 7200.0 {
        (error_s / 60.0, "min")
    } else {
        (error_s / 3600.0, "h")
    };
    let text = if value < 1.0 {
        format!("{value:.2}")
    } else if value < 10.0 {
        format!("{value:.1}")
    } else {
        format!("{value:.0}")
    };
    format!("{text} {unit}")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn danger_is_never_said_later_than_it_is() {
        for (time, down, up) in [
            (0.0, "0 s", "0 s"),
            (45.6, "45 s", "46 s"),
            (119.9, "119 s", "120 s"),
            (120.0, "2 min", "2 min"),
            (128.1, "2 min 8 s", "2 min 9 s"),
            (1199.5, "19 min 59 s", "20 min"),
            (1259.9, "20 min", "21 min"),
            (7199.0, "1 h 59 min", "2 h"),
            (7200.0, "2 h", "2 h"),
            (86_399.0, "23 h 59 min", "24 h"),
            (172_799.0, "47 h 59 min", "48 h"),
            (172_800.0, "2 d", "2 d"),
            (176_399.0, "2 d", "2 d 1 h"),
        ] {
            assert_eq!(words(time, Rounding::Down), down);
            assert_eq!(words(time, Rounding::Up), up);
        }
        assert_eq!(words(f64::NAN, Rounding::Down), "an unknown time");
    }

    #[test]
    fn errors_have_two_figures() {
        assert_eq!(error_words(0.123), "0.12 s");
        assert_eq!(error_words(13.4), "13 s");
        assert_eq!(error_words(150.0), "2.5 min");
        assert_eq!(error_words(9000.0), "2.5 h");
    }
}
