//! The points between which a march steps.
//!
//! Owns: grid points of every level, instants known before the run, the limit on steps. Points are computed as
//! from + k·step and never summed, so that nothing drifts; the last point is the end itself. Memory does not
//! depend on the number of steps.

/// More steps than this, at any level, are refused.
pub const STEP_LIMIT: u64 = 1_000_000_000;

/// Share of a step within which points are taken as one, and (to − from)/step as whole.
const SAME_POINT: f64 = 1e-9;

/// One part of a grid: steps of `step` up to `to`.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SegmentSpec {
    pub to: f64,
    /// Positive also when marching backwards.
    pub step: f64,
}

/// Why a grid cannot be made.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum GridError {
    /// A bound or step is not a finite number.
    NotFinite,
    /// Start and end (or two segment ends) are the same.
    EmptySpan,
    /// The segment ends do not go in one direction.
    SegmentOrder {
        segment: usize,
    },
    /// The step is zero or negative.
    StepNotPositive {
        segment: usize,
    },
    /// The step is longer than the span that it divides.
    StepLongerThanSpan {
        segment: usize,
    },
    TooManySteps {
        steps: f64,
        limit: u64,
    },
}

/// Base points of a march, including the instants known before the run.
#[derive(Debug, Clone, PartialEq)]
pub struct Grid {
    segments: Vec<Segment>,
    /// In the direction of the march, no two within [`SAME_POINT`] of a step.
    known: Vec<f64>,
    base_steps: u64,
}

/// One step of a level's grid.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Interval {
    pub start: f64,
    pub end: f64,
    /// The start is an instant known before the run, where the rate may jump.
    pub known_start: bool,
    pub known_end: bool,
    /// This is the grid's last step.
    pub last: bool,
}

#[derive(Debug, Clone, Copy, PartialEq)]
struct Segment {
    from: f64,
    to: f64,
    /// Signed.
    step: f64,
    count: u64,
    /// The last interval is shorter than `step`.
    short_last: bool,
}

impl Grid {
    /// Equal steps (positive also when `to` < `from`); the last is shorter when the span is no multiple of it.
    pub fn uniform(from: f64, to: f64, step: f64) -> Result<Grid, GridError> {
        Grid::segmented(from, &[SegmentSpec { to, step }])
    }

    /// Segments of equal steps, one after the other.
    pub fn segmented(from: f64, segments: &[SegmentSpec]) -> Result<Grid, GridError> {
        let last = segments.last().ok_or(GridError::EmptySpan)?;
        let direction = (last.to - from).signum();
        let mut start = from;
        let mut made = Vec::with_capacity(segments.len());
        let mut steps = 0.0;
        for (index, spec) in segments.iter().enumerate() {
            let segment = Segment::new(index, start, *spec, direction)?;
            steps += segment.count as f64;
            start = segment.to;
            made.push(segment);
        }
        if steps > STEP_LIMIT as f64 {
            return Err(GridError::TooManySteps {
                steps,
                limit: STEP_LIMIT,
            });
        }
        let base_steps = made.iter().map(|segment| segment.count).sum();
        Ok(Grid {
            segments: made,
            known: Vec::new(),
            base_steps,
        })
    }

    /// A grid through given points, at least two, in one direction.
    pub fn through(points: &[f64]) -> Result<Grid, GridError> {
        let specs: Vec<SegmentSpec> = points
            .windows(2)
            .map(|pair| SegmentSpec {
                to: pair[1],
                step: (pair[1] - pair[0]).abs(),
            })
            .collect();
        let from = points.first().copied().ok_or(GridError::EmptySpan)?;
        Grid::segmented(from, &specs)
    }

    /// The same grid with `instants` inside its span as points at every level; those outside are left out.
    pub fn with_known(mut self, instants: &[f64]) -> Grid {
        let (from, to) = (self.from(), self.to());
        let direction = (to - from).signum();
        let mut known: Vec<f64> = self.known.iter().chain(instants).copied().collect();
        known.retain(|t| {
            t.is_finite() && (t - from) * direction >= 0.0 && (to - t) * direction >= 0.0
        });
        known.sort_by(|a, b| (a * direction).total_cmp(&(b * direction)));
        let segments = &self.segments;
        let mut added = 0;
        let mut kept: Vec<f64> = Vec::with_capacity(known.len());
        for t in known {
            let near = |other: f64, step: f64| (t - other).abs() <= SAME_POINT * step.abs();
            let Some(segment) = segments.iter().find(|s| (s.to - t) * direction >= 0.0) else {
                continue;
            };
            if kept.last().is_some_and(|last| near(*last, segment.step)) {
                continue;
            }
            kept.push(t);
            let k = ((t - segment.from) / segment.step).round();
            let is_point = near(segment.to, segment.step)
                || (k < segment.count as f64
                    && near(segment.from + k * segment.step, segment.step));
            if !is_point {
                added += 1;
            }
        }
        self.known = kept;
        self.base_steps = self.segments.iter().map(|s| s.count).sum::<u64>() + added;
        self
    }

    pub fn from(&self) -> f64 {
        self.segments[0].from
    }

    pub fn to(&self) -> f64 {
        self.segments[self.segments.len() - 1].to
    }

    /// Number of steps at `level`, without steps cut by events.
    pub fn steps(&self, level: u32) -> u64 {
        2_u64
            .checked_pow(level)
            .and_then(|parts| self.base_steps.checked_mul(parts))
            .unwrap_or(u64::MAX)
    }

    /// Longest step at level 0.
    pub fn longest_step(&self) -> f64 {
        self.segments
            .iter()
            .map(|s| s.step.abs().min((s.to - s.from).abs()))
            .fold(0.0, f64::max)
    }

    /// Ends of the segments whose last interval is shorter than their step.
    pub fn short_last_intervals(&self) -> impl Iterator<Item = f64> + '_ {
        self.segments.iter().filter(|s| s.short_last).map(|s| s.to)
    }

    /// The steps of `level`: every base interval in 2^level equal parts.
    pub fn intervals(&self, level: u32) -> Intervals<'_> {
        let from = self.from();
        let known_from = self.known.first() == Some(&from);
        Intervals {
            grid: self,
            parts: 2_u64.checked_pow(level).unwrap_or(u64::MAX),
            segment: 0,
            index: 0,
            next_known: usize::from(known_from),
            base: None,
            part: 0,
            at: from,
            at_known: known_from,
        }
    }

    /// Whether the start is an instant known before the run.
    pub fn known_start(&self) -> bool {
        self.known.first() == Some(&self.from())
    }
}

/// Iterator over the steps of one level, see [`Grid::intervals`].
#[derive(Debug, Clone)]
pub struct Intervals<'a> {
    grid: &'a Grid,
    parts: u64,
    segment: usize,
    /// Regular points of the segment passed so far.
    index: u64,
    next_known: usize,
    base: Option<Interval>,
    part: u64,
    at: f64,
    at_known: bool,
}

impl Iterator for Intervals<'_> {
    type Item = Interval;

    fn next(&mut self) -> Option<Interval> {
        if self.base.is_none() {
            self.base = self.next_base();
            self.part = 0;
        }
        let base = self.base?;
        let width = (base.end - base.start) / self.parts as f64;
        let first = self.part == 0;
        let start = if first {
            base.start
        } else {
            base.start + self.part as f64 * width
        };
        self.part += 1;
        let final_part = self.part == self.parts;
        if final_part {
            self.base = None;
        }
        Some(Interval {
            start,
            end: if final_part {
                base.end
            } else {
                base.start + self.part as f64 * width
            },
            known_start: first && base.known_start,
            known_end: final_part && base.known_end,
            last: final_part && base.last,
        })
    }
}

impl Intervals<'_> {
    fn next_base(&mut self) -> Option<Interval> {
        let segment = *self.grid.segments.get(self.segment)?;
        let direction = segment.step.signum();
        let tolerance = SAME_POINT * segment.step.abs();
        while let Some(known) = self.grid.known.get(self.next_known)
            && (known - self.at) * direction <= tolerance
        {
            self.next_known += 1;
            self.at_known = true;
        }
        let at_segment_end = self.index + 1 >= segment.count;
        let regular = if at_segment_end {
            segment.to
        } else {
            segment.from + (self.index + 1) as f64 * segment.step
        };
        let mut end = regular;
        let mut known_end = false;
        let mut reaches_regular = true;
        if let Some(&known) = self.grid.known.get(self.next_known)
            && (known - regular) * direction <= tolerance
        {
            reaches_regular = (known - regular).abs() <= tolerance;
            known_end = true;
            self.next_known += 1;
            // Segment ends stay exact; elsewhere the instant itself becomes the point.
            if !(reaches_regular && at_segment_end) {
                end = known;
            }
        }
        let interval = Interval {
            start: self.at,
            end,
            known_start: self.at_known,
            known_end,
            last: reaches_regular && at_segment_end && self.segment + 1 == self.grid.segments.len(),
        };
        if reaches_regular {
            self.index += 1;
            if at_segment_end {
                self.segment += 1;
                self.index = 0;
            }
        }
        self.at = end;
        self.at_known = known_end;
        Some(interval)
    }
}

impl Segment {
    fn new(
        index: usize,
        from: f64,
        spec: SegmentSpec,
        direction: f64,
    ) -> Result<Segment, GridError> {
        let SegmentSpec { to, step } = spec;
        if !(from.is_finite() && to.is_finite() && step.is_finite() && (to - from).is_finite()) {
            return Err(GridError::NotFinite);
        }
        if to == from {
            return Err(GridError::EmptySpan);
        }
        if (to - from) * direction < 0.0 {
            return Err(GridError::SegmentOrder { segment: index });
        }
        if step <= 0.0 {
            return Err(GridError::StepNotPositive { segment: index });
        }
        let exact = (to - from).abs() / step;
        let whole = exact.round();
        let is_whole =
            whole >= 1.0 && (exact - whole).abs() <= SAME_POINT.max(4.0 * f64::EPSILON * whole);
        if exact < 1.0 && !is_whole {
            return Err(GridError::StepLongerThanSpan { segment: index });
        }
        let steps = if is_whole { whole } else { exact.floor() + 1.0 };
        if steps > STEP_LIMIT as f64 {
            return Err(GridError::TooManySteps {
                steps,
                limit: STEP_LIMIT,
            });
        }
        Ok(Segment {
            from,
            to,
            step: step * direction,
            count: steps as u64,
            short_last: !is_whole,
        })
    }
}
