//! Finds room for labels: beside a point, along a level, at the ends of lines.

/// A box on the canvas; `top` is less than `bottom`.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Box2 {
    pub left: f64,
    pub top: f64,
    pub right: f64,
    pub bottom: f64,
}

impl Box2 {
    fn at(left: f64, top: f64, size: (f64, f64)) -> Self {
        Box2 { left, top, right: left + size.0, bottom: top + size.1 }
    }

    /// Height of its middle.
    pub fn middle_y(&self) -> f64 {
        0.5 * (self.top + self.bottom)
    }

    /// The place along its width that is nearest to `x`.
    pub fn nearest_x(&self, x: f64) -> f64 {
        x.clamp(self.left, self.right)
    }

    fn holds(&self, other: &Box2) -> bool {
        other.left >= self.left && other.right <= self.right && other.top >= self.top && other.bottom <= self.bottom
    }

    fn distance_to(&self, point: (f64, f64)) -> f64 {
        let away = |low: f64, high: f64, at: f64| (low - at).max(at - high).max(0.0);
        away(self.left, self.right, point.0).hypot(away(self.top, self.bottom, point.1))
    }

    fn distance_to_box(&self, other: &Box2) -> f64 {
        let across = (self.left - other.right).max(other.left - self.right).max(0.0);
        across.hypot((self.top - other.bottom).max(other.top - self.bottom).max(0.0))
    }
}

/// What labels keep clear of, and the search for the clearest place.
pub struct Placer {
    frame: Box2,
    points: Vec<(f64, f64)>,
    boxes: Vec<Box2>,
}

/// Clearance that is as good as any more.
const ENOUGH: f64 = 16.0;
/// Spacing of the points that stand for a line.
const POINT_SPACING: f64 = 12.0;

impl Placer {
    pub fn new(frame: Box2) -> Self {
        Placer { frame, points: Vec::new(), boxes: Vec::new() }
    }

    pub fn avoid_line(&mut self, path: &[(f64, f64)]) {
        for pair in path.windows(2) {
            let length = (pair[1].0 - pair[0].0).hypot(pair[1].1 - pair[0].1);
            let count = (length / POINT_SPACING).ceil().max(1.0) as u32;
            self.points.extend((0..=count).map(|index| {
                let share = f64::from(index) / f64::from(count);
                (pair[0].0 + share * (pair[1].0 - pair[0].0), pair[0].1 + share * (pair[1].1 - pair[0].1))
            }));
        }
    }

    pub fn avoid_box(&mut self, place: Box2) {
        self.boxes.push(place);
    }

    fn clearance(&self, place: &Box2) -> f64 {
        if !self.frame.holds(place) {
            return -1.0;
        }
        let of_points = self.points.iter().map(|&point| place.distance_to(point));
        let of_boxes = self.boxes.iter().map(|other| place.distance_to_box(other));
        of_points.chain(of_boxes).fold(ENOUGH, f64::min)
    }

    /// Takes the first of the places that is clear enough, else the clearest; none within the frame moves the first into it.
    fn take(&mut self, places: impl Iterator<Item = Box2>) -> Box2 {
        let mut best: Option<(f64, Box2)> = None;
        let mut first = None;
        for place in places {
            first.get_or_insert(place);
            let clearance = self.clearance(&place);
            if best.is_none_or(|(most, _)| clearance > most) {
                best = Some((clearance, place));
            }
            if clearance >= ENOUGH {
                break;
            }
        }
        let place = match best {
            Some((clearance, place)) if clearance >= 0.0 => place,
            _ => self.moved_in(first.unwrap_or(self.frame)),
        };
        self.boxes.push(place);
        place
    }

    fn moved_in(&self, place: Box2) -> Box2 {
        let size = (place.right - place.left, place.bottom - place.top);
        let left = place.left.min(self.frame.right - size.0).max(self.frame.left);
        let top = place.top.min(self.frame.bottom - size.1).max(self.frame.top);
        Box2::at(left, top, size)
    }

    /// A place for a label of a point, near it and clear of everything.
    pub fn beside(&mut self, at: (f64, f64), size: (f64, f64)) -> Box2 {
        let rings = (0..14).map(|ring| 30.0 + 34.0 * f64::from(ring));
        let places: Vec<Box2> = rings
            .flat_map(|away| {
                let (right, left) = (at.0 + 0.7 * away, at.0 - 0.7 * away - size.0);
                let (above, below) = (at.1 - away - size.1, at.1 + away);
                let middle = at.1 - 0.5 * size.1;
                [
                    (right, above),
                    (left, above),
                    (right, below),
                    (left, below),
                    (at.0 - 0.5 * size.0, above),
                    (at.0 - 0.5 * size.0, below),
                    (at.0 + away, middle),
                    (at.0 - away - size.0, middle),
                ]
            })
            .map(|(left, top)| Box2::at(left, top, size))
            .collect();
        self.take(places.into_iter())
    }

    /// A place for the name of a level, just above or below it, as far to the right as is clear.
    pub fn along(&mut self, level: f64, size: (f64, f64)) -> Box2 {
        let span = self.frame.right - self.frame.left - size.0 - 48.0;
        let left = self.frame.left + 24.0;
        let places: Vec<Box2> = (0..=40)
            .flat_map(|step| {
                let left = left + span.max(0.0) * f64::from(40 - step) / 40.0;
                [level - size.1 - ENOUGH, level + ENOUGH].map(|top| Box2::at(left, top, size))
            })
            .collect();
        self.take(places.into_iter())
    }
}

/// Moves ascending places apart to at least `gap` within the ends, each group about the middle of what it wished for.
pub fn spread(wished: &[f64], gap: f64, (low, high): (f64, f64)) -> Vec<f64> {
    let gap = if wished.len() > 1 { gap.min((high - low) / (wished.len() - 1) as f64) } else { gap };
    // Groups of touching places: their number and the sum of (wish - offset within the group).
    let mut groups: Vec<(usize, f64)> = Vec::new();
    let start_of = |group: &(usize, f64)| (group.1 / group.0 as f64).min(high - gap * (group.0 - 1) as f64).max(low);
    for &wish in wished {
        groups.push((1, wish));
        while let [.., before, last] = groups.as_slice() {
            if start_of(before) + gap * before.0 as f64 <= start_of(last) + 1e-9 {
                break;
            }
            let joined = (before.0 + last.0, before.1 + last.1 - gap * (before.0 * last.0) as f64);
            groups.truncate(groups.len() - 2);
            groups.push(joined);
        }
    }
    groups.iter().flat_map(|group| (0..group.0).map(move |index| start_of(group) + gap * index as f64)).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn labels_that_touch_are_spread_about_their_middle() {
        assert_eq!(spread(&[10.0, 100.0], 20.0, (0.0, 200.0)), vec![10.0, 100.0]);
        assert_eq!(spread(&[100.0, 100.0, 100.0], 20.0, (0.0, 200.0)), vec![80.0, 100.0, 120.0]);
        assert_eq!(spread(&[195.0, 199.0], 20.0, (0.0, 200.0)), vec![180.0, 200.0]);
        let crowded = spread(&[0.0; 11], 50.0, (0.0, 100.0));
        assert!((crowded[10] - 100.0).abs() < 1e-9 && (crowded[1] - 10.0).abs() < 1e-9, "{crowded:?}");
    }

    #[test]
    fn a_label_keeps_clear_of_lines_and_of_others() {
        let mut placer = Placer::new(Box2 { left: 0.0, top: 0.0, right: 1000.0, bottom: 500.0 });
        placer.avoid_line(&[(0.0, 250.0), (1000.0, 250.0)]);
        let first = placer.beside((500.0, 250.0), (200.0, 40.0));
        let second = placer.beside((500.0, 250.0), (200.0, 40.0));
        assert!(first.bottom < 250.0 - 15.0 || first.top > 250.0 + 15.0);
        assert!(first.distance_to_box(&second) >= 15.0, "{first:?} {second:?}");
    }
}
