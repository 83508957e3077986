//! One step with every intermediate, for a check by hand.

use super::stepper::{Span, Stepper};
use super::{Method, Scheme, System};

/// One stage of a step.
#[derive(Debug, Clone, PartialEq)]
pub struct Stage {
    pub value_name: &'static str,
    pub slope_name: &'static str,
    pub t: f64,
    pub y: Vec<f64>,
    /// f(t, y), evaluated for the trace.
    pub slope: Vec<f64>,
    /// What is left when the printed stages are put into an implicit stage's equation, y + h Σ a f − Y;
    /// empty where a stage follows from earlier ones.
    pub residual: Vec<f64>,
}

/// A step with all its stages.
#[derive(Debug, Clone, PartialEq)]
pub struct Trace {
    /// Title of the one-step method traced: the starter of a method that needs a past.
    pub method: &'static str,
    pub stages: Vec<Stage>,
    pub result_name: &'static str,
    pub end: f64,
    pub result: Vec<f64>,
}

/// One step of `method` (of its starter if it needs a past) from (t, y) over h; `None` when it has no result.
pub fn trace_step(
    system: &mut dyn System,
    method: &Method,
    t: f64,
    y: &[f64],
    h: f64,
) -> Option<Trace> {
    let method = method.starter();
    let span = Span::new(t, t + h, None, false);
    let states = system.states();
    let mut stepper = Stepper::new(method, states, y.len(), &[]);
    let mut slope = vec![0.0; y.len()];
    let mut result = vec![0.0; y.len()];
    stepper.rate(system, span.time(0.0), y, &mut slope);
    stepper.step(system, &span, y, &slope, &mut result).ok()?;
    let last_name = method.stage_names[method.stage_names.len() - 1];
    let mut stages: Vec<Stage> = Vec::new();
    stepper.visit_stages(|c, value, _| {
        // A repeated corrector has more stages than names; the last name goes on.
        let name = method.stage_names.get(stages.len()).unwrap_or(&last_name);
        stages.push(Stage {
            value_name: name.value,
            slope_name: name.slope,
            t: span.time(c),
            y: value.to_vec(),
            slope: vec![0.0; y.len()],
            residual: Vec::new(),
        });
    });
    for stage in &mut stages {
        system.rate(stage.t, &stage.y, &mut stage.slope);
    }
    if let Scheme::RungeKutta(tableau) = method.scheme {
        let slopes: Vec<Vec<f64>> = stages.iter().map(|stage| stage.slope.clone()).collect();
        for (i, stage) in stages.iter_mut().enumerate() {
            let weights: Vec<f64> = (0..tableau.stages())
                .map(|j| tableau.entry(i, j).value(tableau.radicand))
                .collect();
            if weights[i..].iter().any(|weight| *weight != 0.0) {
                stage.residual = (0..states)
                    .map(|at| {
                        let sum = weights
                            .iter()
                            .zip(&slopes)
                            .fold(0.0, |sum, (weight, slope)| sum + weight * slope[at]);
                        y[at] + span.h() * sum - stage.y[at]
                    })
                    .collect();
            }
        }
    }
    Some(Trace {
        method: method.title,
        stages,
        result_name: method.result_name,
        end: span.end,
        result,
    })
}
