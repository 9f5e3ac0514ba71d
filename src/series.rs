//! A quantity over time: a constant, or a table from a file.

/// A quantity over time.
#[derive(Debug, Clone, PartialEq)]
pub enum Series {
    /// The same at all times.
    Constant(f64),
    /// Values at ascending times, joined linearly.
    Table {
        /// Times [s], strictly ascending, at least two.
        times_s: Vec<f64>,
        /// Values at those times.
        values: Vec<f64>,
        /// Where it came from, for reports (`january.csv, column air_degC`).
        source: String,
    },
}

impl Series {
    /// Value at a time; the end values hold beyond the table.
    pub fn at(&self, time_s: f64) -> f64 {
        match self {
            Series::Constant(value) => *value,
            Series::Table { times_s, values, .. } => {
                let after = times_s.partition_point(|&time| time <= time_s);
                if after == 0 {
                    return values[0];
                }
                if after == times_s.len() {
                    return values[after - 1];
                }
                let share = (time_s - times_s[after - 1]) / (times_s[after] - times_s[after - 1]);
                values[after - 1] + share * (values[after] - values[after - 1])
            }
        }
    }

    /// The next kink strictly after a time [s], if there is one.
    pub fn next_kink(&self, time_s: f64) -> Option<f64> {
        match self {
            Series::Constant(_) => None,
            Series::Table { times_s, .. } => {
                let after = times_s.partition_point(|&time| time <= time_s);
                times_s.get(after).copied()
            }
        }
    }

    /// The last time that the table covers [s]; `None` for a constant, which never ends.
    pub fn ends_s(&self) -> Option<f64> {
        match self {
            Series::Constant(_) => None,
            Series::Table { times_s, .. } => times_s.last().copied(),
        }
    }

    /// Lowest and highest value over all times.
    pub fn range(&self) -> (f64, f64) {
        match self {
            Series::Constant(value) => (*value, *value),
            Series::Table { values, .. } => values
                .iter()
                .fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), &value| (low.min(value), high.max(value))),
        }
    }
}
