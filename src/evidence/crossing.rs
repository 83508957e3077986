//! One crossing of the whole span by the alternate integrator, with events found on its dense output.
//!
//! Owns: stops and restarts at known instants and events, bisection for events and stationary points, reading of
//! probes. Time runs from 0 to 1 inside the integrator, whatever the span and its direction.

use std::cell::RefCell;

use diffsol::{
    NalgebraLU, NalgebraMat, NalgebraVec, OdeBuilder, OdeEquations, OdeSolverMethod,
    OdeSolverStopReason, Vector,
};

use super::reader::Reader;
use crate::calculation::{CaseSystem, Reading};
use crate::march::{Plan, System};

type Matrix = NalgebraMat<f64>;
type Values = NalgebraVec<f64>;
type Solver = NalgebraLU<f64>;

/// More steps than this are a failure.
const MOST_STEPS: u64 = 200_000;
/// More restarts than this are a failure: sliding along a switching surface.
const MOST_RESTARTS: u64 = 20_000;
/// Values down to this share of their typical magnitude are found to the full relative tolerance.
const SMALL: f64 = 0.01;
/// Pieces in which each step is searched for events and stationary points.
const PIECES: u32 = 8;
/// Distance kept from a known instant, in units of the last place.
const SIDE_ULPS: f64 = 8.0;

/// What the integrator needs beside the equations.
pub struct Setting {
    pub from: f64,
    pub to: f64,
    /// Instants to stop at, in order; the last is the end.
    pub stops: Vec<f64>,
    /// Relative tolerance of one step, well below that of the whole, since errors of steps add up.
    pub tolerance: f64,
    /// Typical magnitude of each state and quadrature.
    pub sizes: Vec<f64>,
    pub is_stiff: bool,
}

/// What came out.
pub struct Crossing {
    pub reading: Reading,
    /// Events in the order in which they came.
    pub events: Vec<usize>,
}

/// Integrates from the plan's start over all stops; the switches are put back.
///
/// # Errors
/// Why it did not come to the end, in words.
pub fn cross(system: &mut CaseSystem, plan: &Plan, setting: &Setting) -> Result<Crossing, String> {
    let switches = system.switches();
    let shared = RefCell::new(system);
    let crossed = run(&shared, plan, setting);
    shared.into_inner().restore(&switches);
    crossed
}

/// The equations, shared between the integrator's closures and the reader.
type Shared<'s, 'b> = RefCell<&'s mut CaseSystem<'b>>;

fn run(shared: &Shared, plan: &Plan, setting: &Setting) -> Result<Crossing, String> {
    let mut y = plan.y0.clone();
    let mut reader = Reader::new(plan);
    let mut t = setting.from;
    let mut state = Progress {
        steps: 0,
        restarts: 0,
    };
    let mut stopped = reader.begin(*shared.borrow_mut(), t, &mut y);
    for stop in &setting.stops {
        while !stopped && t != *stop {
            let segment = Segment {
                from: t,
                to: *stop,
                setting,
                shared,
            };
            let (reached, cut) = segment.cross(&mut y, &mut reader, &mut state)?;
            t = reached;
            if cut {
                stopped = reader.act(*shared.borrow_mut(), t, &mut y);
            }
        }
        if stopped {
            break;
        }
        if *stop != setting.to {
            // What turns at a known instant is seen from beyond it.
            stopped = reader.beyond(
                *shared.borrow_mut(),
                t,
                t + segment_margin(t, setting),
                &mut y,
            );
        }
    }
    let probes = reader.finish(*shared.borrow_mut(), t, &y);
    Ok(Crossing {
        reading: Reading { probes, y, at: t },
        events: reader.events,
    })
}

fn segment_margin(t: f64, setting: &Setting) -> f64 {
    SIDE_ULPS * f64::EPSILON * t.abs().max(setting.to.abs()) * (setting.to - setting.from).signum()
}

struct Progress {
    steps: u64,
    restarts: u64,
}

/// A stretch without known instants inside it.
struct Segment<'a, 's, 'b> {
    from: f64,
    to: f64,
    setting: &'a Setting,
    shared: &'a Shared<'s, 'b>,
}

impl Segment<'_, '_, '_> {
    /// Integrates until its end or until an event cuts it; returns the instant and whether it was cut.
    fn cross(
        &self,
        y: &mut Vec<f64>,
        reader: &mut Reader,
        progress: &mut Progress,
    ) -> Result<(f64, bool), String> {
        progress.restarts += 1;
        if progress.restarts > MOST_RESTARTS {
            return Err(format!("it restarted more than {MOST_RESTARTS} times"));
        }
        let setting = self.setting;
        let span = setting.to - setting.from;
        let states = self.shared.borrow().states();
        let margin = segment_margin(self.from, setting);
        let (first, last) = (self.from + margin, self.to - margin);
        let (low, high) = (first.min(last), first.max(last));
        let time = move |s: f64| (setting.from + s * span).clamp(low, high);
        let start = y.clone();
        let shared = self.shared;
        let problem = OdeBuilder::<Matrix>::new()
            .t0((self.from - setting.from) / span)
            .rtol(setting.tolerance)
            .atol(
                setting
                    .sizes
                    .iter()
                    .map(|size| SMALL * size * setting.tolerance),
            )
            .rhs_implicit(
                move |x: &[f64], _: &[f64], s: f64, out: &mut [f64]| {
                    shared.borrow_mut().rate(time(s), x, out);
                    out.iter_mut().for_each(|slope| *slope *= span);
                },
                move |x: &[f64], _: &[f64], s: f64, v: &[f64], out: &mut [f64]| {
                    // Quadratures depend on states alone; leaving their rows out changes only how Newton gets there.
                    let mut jacobian = vec![0.0; states * states];
                    shared.borrow_mut().jacobian(time(s), x, &mut jacobian);
                    out.fill(0.0);
                    for (row, entry) in out.iter_mut().enumerate().take(states) {
                        *entry = span
                            * (0..states).fold(0.0, |sum, column| {
                                sum + jacobian[row * states + column] * v[column]
                            });
                    }
                },
            )
            .init(
                move |_: &[f64], _: f64, out: &mut [f64]| out.copy_from_slice(&start),
                setting.sizes.len(),
            )
            .build();
        let mut problem = problem.map_err(|error| error.to_string())?;
        problem.ode_options.max_number_timesteps =
            usize::try_from(MOST_STEPS).unwrap_or(usize::MAX);
        if setting.is_stiff {
            let mut solver = problem.bdf::<Solver>().map_err(|error| error.to_string())?;
            self.steps(&mut solver, y, reader, progress)
        } else {
            let mut solver = problem.tsit45().map_err(|error| error.to_string())?;
            self.steps(&mut solver, y, reader, progress)
        }
    }

    fn steps<'p, E, S>(
        &self,
        solver: &mut S,
        y: &mut Vec<f64>,
        reader: &mut Reader,
        progress: &mut Progress,
    ) -> Result<(f64, bool), String>
    where
        E: OdeEquations<T = f64, V = Values> + 'p,
        S: OdeSolverMethod<'p, E>,
    {
        let span = self.setting.to - self.setting.from;
        let share = |t: f64| (t - self.setting.from) / span;
        let words = |error: diffsol::DiffsolError| error.to_string();
        let end = share(self.to);
        if end - share(self.from) > 4.0 * f64::EPSILON {
            solver.set_stop_time(end).map_err(words)?;
        } else {
            return Ok((self.to, false));
        }
        loop {
            let before = solver.state().t;
            let reason = solver.step().map_err(words)?;
            progress.steps += 1;
            if progress.steps > MOST_STEPS {
                return Err(format!("it needed more than {MOST_STEPS} steps"));
            }
            let after = solver.state().t;
            if solver
                .state()
                .y
                .clone_as_vec()
                .iter()
                .any(|value| !value.is_finite())
            {
                return Err("a value is not finite".to_owned());
            }
            let is_last = matches!(reason, OdeSolverStopReason::TstopReached);
            let at = |s: f64| {
                if s >= after {
                    solver.state().y.clone_as_vec()
                } else {
                    solver.interpolate(s).map_or_else(
                        |_| solver.state().y.clone_as_vec(),
                        |values| values.clone_as_vec(),
                    )
                }
            };
            let time = |s: f64| {
                if is_last && s >= after {
                    self.to
                } else {
                    self.setting.from + s * span
                }
            };
            let mut low = before;
            for piece in 1..=PIECES {
                let high = if piece == PIECES {
                    after
                } else {
                    before + (after - before) * f64::from(piece) / f64::from(PIECES)
                };
                let mut dense = |s: f64| (time(s), at(s));
                if let Some(cut) = reader.piece(*self.shared.borrow_mut(), low, high, &mut dense) {
                    *y = at(cut);
                    return Ok((time(cut), true));
                }
                low = high;
            }
            if is_last {
                *y = at(after);
                return Ok((self.to, false));
            }
        }
    }
}
