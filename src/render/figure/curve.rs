//! Curves in points: cut at the edges of their panel, thinned to what print can show.

use super::fraction;
use crate::record::block::{Axis, Panel};
use crate::render::scene::{Area, Point};

/// What is left of one series inside its panel.
pub struct Curve {
    /// Index into the panel's series.
    pub series: usize,
    /// Connected pieces; more than one where the data leave the panel or are not finite.
    pub pieces: Vec<Vec<Point>>,
    pub markers: Vec<Point>,
}

impl Curve {
    pub fn segments(&self) -> impl Iterator<Item = (Point, Point)> {
        self.pieces
            .iter()
            .flat_map(|piece| piece.windows(2).map(|pair| (pair[0], pair[1])))
    }
}

/// Deviation that thinning may cause, in points: a tenth of a hairline.
const THINNING: f32 = 0.03;

pub fn clipped_curves(panel: &Panel, x: &Axis, area: Area) -> Vec<Curve> {
    let curve = |(index, series): (usize, &crate::record::block::Series)| {
        let place = |(at, value): &(f64, f64)| {
            let inside = at.is_finite() && value.is_finite();
            let fractions = (fraction(x, *at), fraction(&panel.y, *value));
            (inside && fractions.0.is_finite() && fractions.1.is_finite()).then_some(fractions)
        };
        let fractions: Vec<Option<(f64, f64)>> = series.points.iter().map(place).collect();
        let to_point = |(u, v): (f64, f64)| Point {
            x: area.left + (area.right - area.left) * u as f32,
            y: area.bottom - (area.bottom - area.top) * v as f32,
        };
        let within = |(u, v): (f64, f64)| {
            (-1e-9..=1.0 + 1e-9).contains(&u) && (-1e-9..=1.0 + 1e-9).contains(&v)
        };
        let pieces = if series.line {
            pieces(&fractions)
        } else {
            Vec::new()
        };
        Curve {
            series: index,
            pieces: pieces
                .iter()
                .map(|piece| thinned(&piece.iter().map(|p| to_point(*p)).collect::<Vec<_>>()))
                .collect(),
            markers: match series.markers {
                true => fractions
                    .iter()
                    .flatten()
                    .copied()
                    .filter(|p| within(*p))
                    .map(to_point)
                    .collect(),
                false => Vec::new(),
            },
        }
    };
    panel.series.iter().enumerate().map(curve).collect()
}

/// Joins the parts of consecutive segments that lie in the unit square.
fn pieces(points: &[Option<(f64, f64)>]) -> Vec<Vec<(f64, f64)>> {
    let mut pieces: Vec<Vec<(f64, f64)>> = Vec::new();
    let mut open = false;
    for pair in points.windows(2) {
        let (Some(a), Some(b)) = (pair[0], pair[1]) else {
            open = false;
            continue;
        };
        let Some((from, to)) = cut(a, b) else {
            open = false;
            continue;
        };
        match pieces.last_mut() {
            Some(piece) if open && piece.last() == Some(&from) => piece.push(to),
            _ => pieces.push(vec![from, to]),
        }
        open = to == b;
    }
    pieces
}

/// The part of a segment inside the unit square (Liang and Barsky, ACM Trans. Graph. 3 (1984) 1).
fn cut(a: (f64, f64), b: (f64, f64)) -> Option<((f64, f64), (f64, f64))> {
    let (dx, dy) = (b.0 - a.0, b.1 - a.1);
    let (mut enter, mut leave) = (0.0_f64, 1.0_f64);
    for (p, q) in [(-dx, a.0), (dx, 1.0 - a.0), (-dy, a.1), (dy, 1.0 - a.1)] {
        if p == 0.0 {
            if q < 0.0 {
                return None;
            }
        } else if p < 0.0 {
            enter = enter.max(q / p);
        } else {
            leave = leave.min(q / p);
        }
    }
    if enter > leave {
        return None;
    }
    let at = |t: f64| (a.0 + t * dx, a.1 + t * dy);
    Some((
        if enter == 0.0 { a } else { at(enter) },
        if leave == 1.0 { b } else { at(leave) },
    ))
}

/// Drops points whose loss moves the line by less than [`THINNING`] (Douglas and Peucker, iterative).
fn thinned(points: &[Point]) -> Vec<Point> {
    if points.len() < 3 {
        return points.to_vec();
    }
    let mut kept = vec![false; points.len()];
    kept[0] = true;
    kept[points.len() - 1] = true;
    let mut open = vec![(0, points.len() - 1)];
    while let Some((first, last)) = open.pop() {
        let (a, b) = (points[first], points[last]);
        let (dx, dy) = (b.x - a.x, b.y - a.y);
        let length = (dx * dx + dy * dy).sqrt();
        let distance = |p: Point| match length > 1e-6 {
            true => ((p.x - a.x) * dy - (p.y - a.y) * dx).abs() / length,
            false => ((p.x - a.x) * (p.x - a.x) + (p.y - a.y) * (p.y - a.y)).sqrt(),
        };
        let mut farthest = (THINNING, None);
        for (i, point) in points.iter().enumerate().take(last).skip(first + 1) {
            let d = distance(*point);
            if d > farthest.0 {
                farthest = (d, Some(i));
            }
        }
        if let Some(i) = farthest.1 {
            kept[i] = true;
            open.push((first, i));
            open.push((i, last));
        }
    }
    points
        .iter()
        .zip(kept)
        .filter_map(|(point, keep)| keep.then_some(*point))
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn hand_segments_are_cut_at_the_edges() {
        assert_eq!(cut((0.5, -1.0), (0.5, 3.0)), Some(((0.5, 0.0), (0.5, 1.0))));
        assert_eq!(cut((-1.0, 2.0), (2.0, 2.0)), None);
        assert_eq!(
            cut((0.25, 0.25), (0.75, 0.5)),
            Some(((0.25, 0.25), (0.75, 0.5)))
        );
    }

    #[test]
    fn hand_a_curve_that_leaves_and_returns_has_two_pieces() {
        let points = [
            Some((0.0, 0.5)),
            Some((0.25, 1.5)),
            Some((0.5, 0.5)),
            None,
            Some((0.9, 0.5)),
            Some((1.0, 0.5)),
        ];
        let found = pieces(&points);
        assert_eq!(
            found,
            vec![
                vec![(0.0, 0.5), (0.125, 1.0)],
                vec![(0.375, 1.0), (0.5, 0.5)],
                vec![(0.9, 0.5), (1.0, 0.5)]
            ]
        );
    }

    #[test]
    fn prop_thinning_keeps_ends_and_corners() {
        let line: Vec<Point> = (0..=100)
            .map(|i| Point {
                x: i as f32,
                y: (i as f32 - 50.0).abs(),
            })
            .collect();
        assert_eq!(thinned(&line), vec![line[0], line[50], line[100]]);
    }
}
