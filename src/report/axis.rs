//! Axes: ranges with a little air, round ticks, and units of time that read well.

use super::text;

/// One axis of a panel.
#[derive(Debug, Clone, PartialEq)]
pub struct Axis {
    /// What it shows, with its unit in brackets.
    pub label: String,
    /// Its lower end.
    pub low: f64,
    /// Its upper end.
    pub high: f64,
    /// Ticks, ascending, within the ends.
    pub ticks: Vec<f64>,
    /// The tick's labels.
    pub tick_labels: Vec<String>,
}

impl Axis {
    /// An axis over a range, with ticks at the smallest of the round steps (1, 2 or 5 times a power of ten) that gives no more than
    /// `most_ticks`.
    pub fn new(label: impl Into<String>, low: f64, high: f64, most_ticks: usize) -> Self {
        Axis::with_step(label.into(), low, high, round_step((high - low) / most_ticks.max(1) as f64))
    }

    /// An axis that holds all the values, with a little air at either end; finite values only are looked at.
    pub fn around(label: impl Into<String>, values: impl IntoIterator<Item = f64>, most_ticks: usize) -> Self {
        let (low, high) = range(values).unwrap_or((0.0, 1.0));
        let span = if high - low > 1e-9 * high.abs().max(1.0) { high - low } else { 2.0 };
        let middle = 0.5 * (low + high);
        Axis::new(label, middle - 0.55 * span, middle + 0.55 * span, most_ticks)
    }

    fn with_step(label: String, low: f64, high: f64, step: f64) -> Self {
        let decimals = (-step.log10()).ceil().clamp(0.0, 12.0) as usize;
        let slack = 1e-9 * step;
        let first = ((low - slack) / step).ceil();
        let ticks: Vec<f64> =
            (0..1000).map(|tick| (first + f64::from(tick)) * step).take_while(|&tick| tick <= high + slack).collect();
        let tick_labels = ticks.iter().map(|&tick| text::fixed(tick, decimals + 1)).collect();
        Axis { label, low, high, ticks, tick_labels }
    }

    /// Where a value lies on the axis: 0 at the lower end, 1 at the upper.
    pub fn share(&self, value: f64) -> f64 {
        (value - self.low) / (self.high - self.low)
    }
}

/// The smallest of 1, 2, 5 times a power of ten that is not below `least`.
fn round_step(least: f64) -> f64 {
    let power = 10f64.powf(least.log10().floor());
    [1.0, 2.0, 5.0, 10.0]
        .map(|digit| digit * power)
        .into_iter()
        .find(|&step| step >= least * (1.0 - 1e-9))
        .unwrap_or(power)
}

/// Lowest and highest of the finite values.
pub(crate) fn range(values: impl IntoIterator<Item = f64>) -> Option<(f64, f64)> {
    values.into_iter().filter(|value| value.is_finite()).fold(None, |range, value| match range {
        None => Some((value, value)),
        Some((low, high)) => Some((f64::min(low, value), f64::max(high, value))),
    })
}

/// A unit of time for an axis.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct TimeUnit {
    /// Its sign.
    pub sign: &'static str,
    /// Its length `[s]`.
    pub seconds: f64,
    steps: &'static [f64],
}

const SECOND: TimeUnit = TimeUnit { sign: "s", seconds: 1.0, steps: &[1.0, 2.0, 5.0, 10.0, 15.0, 20.0, 30.0] };
const MINUTE: TimeUnit = TimeUnit { sign: "min", seconds: 60.0, steps: &[1.0, 2.0, 5.0, 10.0, 15.0, 20.0, 30.0] };
const HOUR: TimeUnit = TimeUnit { sign: "h", seconds: 3600.0, steps: &[0.5, 1.0, 2.0, 3.0, 6.0, 12.0, 24.0] };
const DAY: TimeUnit = TimeUnit { sign: "d", seconds: 86400.0, steps: &[0.5, 1.0, 2.0, 7.0, 14.0, 28.0] };

impl TimeUnit {
    /// The unit in which a span reads well: seconds to 3 min, minutes to 3 h, hours to 5 days, then days.
    pub fn for_span(span_s: f64) -> Self {
        match span_s {
            span if span <= 180.0 => SECOND,
            span if span <= 3.0 * 3600.0 => MINUTE,
            span if span <= 5.0 * 86400.0 => HOUR,
            _ => DAY,
        }
    }

    /// The steps between ticks that are round in this unit, and multiples beyond them.
    fn step(&self, least: f64) -> f64 {
        let least = least * (1.0 - 1e-9);
        if least < self.steps[0] {
            return round_step(least).min(self.steps[0]);
        }
        self.steps.iter().copied().find(|&step| step >= least).unwrap_or_else(|| round_step(least))
    }

    /// A time axis from one time to another `[s]`, in this unit.
    pub fn axis(&self, from_s: f64, to_s: f64, most_ticks: usize) -> Axis {
        let (low, high) = (from_s / self.seconds, to_s / self.seconds);
        let high = if high > low { high } else { low + 1.0 };
        let step = self.step((high - low) / most_ticks as f64);
        Axis::with_step(format!("Time [{}]", self.sign), low, high, step)
    }

    /// Round times from 0 to the one given `[s]`, for captions.
    pub fn round_times(&self, to_s: f64) -> Vec<f64> {
        let high = to_s / self.seconds;
        let mut times = vec![0.0];
        let base: &[f64] = if self.sign == "h" || self.sign == "d" {
            &[0.25, 0.5, 1.0, 2.0, 3.0, 4.0, 6.0, 8.0, 12.0, 18.0, 24.0, 36.0, 48.0, 60.0, 72.0, 84.0, 96.0, 120.0]
        } else {
            &[1.0, 2.0, 3.0, 5.0, 10.0, 15.0, 20.0, 30.0, 45.0, 60.0, 90.0, 120.0, 150.0, 180.0]
        };
        times.extend(base.iter().copied().filter(|&time| time <= high));
        if high > 120.0 || times.len() < 5 {
            let step = round_step(high / 12.0);
            times.extend((1..=12).map(|tick| f64::from(tick) * step).filter(|&time| time <= high));
        }
        times.sort_by(f64::total_cmp);
        times.dedup();
        times.into_iter().map(|time| time * self.seconds).collect()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ticks_are_round_and_within_the_ends() {
        let axis = Axis::around("Temperature [°C]", [-25.0, 6.0, f64::NAN], 8);
        assert_eq!(axis.ticks, vec![-25.0, -20.0, -15.0, -10.0, -5.0, 0.0, 5.0]);
        assert_eq!(axis.tick_labels[0], "\u{2212}25");
        assert!(axis.low < -25.0 && axis.high > 6.0);
    }

    #[test]
    fn a_flat_or_missing_range_still_has_an_axis() {
        assert!(Axis::around("", [5.0, 5.0], 8).ticks.contains(&5.0));
        assert!(!Axis::around("", [f64::NAN], 8).ticks.is_empty());
    }

    #[test]
    fn time_reads_in_its_own_unit() {
        let days = TimeUnit::for_span(96.0 * 3600.0).axis(0.0, 96.0 * 3600.0, 10);
        assert_eq!(days.label, "Time [h]");
        assert_eq!(days.ticks, vec![0.0, 12.0, 24.0, 36.0, 48.0, 60.0, 72.0, 84.0, 96.0]);
        assert_eq!(TimeUnit::for_span(100.0).axis(0.0, 100.0, 10).ticks[1], 10.0);
        assert_eq!(TimeUnit::for_span(90.0 * 60.0).axis(0.0, 5400.0, 10).ticks[1], 10.0);
        assert_eq!(TimeUnit::for_span(40.0 * 86400.0).axis(0.0, 40.0 * 86400.0, 10).ticks[1], 7.0);
        assert_eq!(TimeUnit::for_span(0.02).axis(0.0, 0.02, 10).ticks.len(), 11);
    }
}
