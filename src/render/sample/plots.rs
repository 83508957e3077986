//! Plots and the sketch of the invented record.

use super::*;

pub fn label(parts: &[(&str, bool, Shift)]) -> Label {
    Label(
        parts
            .iter()
            .map(|(text, italic, shift)| Run {
                text: (*text).into(),
                italic: *italic,
                shift: *shift,
            })
            .collect(),
    )
}

pub fn words(text: &str) -> Label {
    label(&[(text, false, Shift::Base)])
}

pub fn ticks(values: &[f64], decimals: usize) -> Vec<Tick> {
    values
        .iter()
        .map(|at| Tick {
            at: *at,
            label: words(&format!("{at:.decimals$}").replace('-', "−")),
        })
        .collect()
}

pub fn decades(from: i32, to: i32, step: usize) -> (Vec<Tick>, Vec<f64>) {
    let ten = |e: i32| (0..e.abs()).fold(1.0, |v, _| if e < 0 { v / 10.0 } else { v * 10.0 });
    let tick = |e: i32| Tick {
        at: ten(e),
        label: label(&[
            ("10", false, Shift::Base),
            (&e.to_string().replace('-', "−"), false, Shift::Superscript),
        ]),
    };
    let minor = (from..to)
        .flat_map(|e| (2..10).map(move |k| f64::from(k) * ten(e)))
        .collect();
    ((from..=to).step_by(step).map(tick).collect(), minor)
}

pub fn history() -> Plot {
    let levels = |factor: f64| -> Vec<(f64, f64)> {
        // Any smooth fall will do for a picture.
        (0..=200)
            .map(|i| {
                (
                    f64::from(i) * 0.1,
                    (3.25 - factor * f64::from(i) * 0.1 * (1.0 - f64::from(i) * 0.0014)).max(0.0),
                )
            })
            .collect()
    };
    let flow = |factor: f64| -> Vec<(f64, f64)> {
        levels(factor)
            .iter()
            .map(|(t, h)| (*t, 100.0 * factor * (h / 3.25).sqrt() + 42.0))
            .collect()
    };
    let series = |name: &str, points: Vec<(f64, f64)>, style: usize| Series {
        label: words(name),
        points,
        style,
        line: true,
        markers: false,
    };
    let instants = vec![
        Mark {
            at: 11.3,
            label: words("low-level alarm, valve open"),
        },
        Mark {
            at: 12.0,
            label: words("rule: 12 min"),
        },
        Mark {
            at: 16.9,
            label: words("alarm, two thirds"),
        },
    ];
    Plot {
        x: Axis {
            title: label(&[
                ("Time ", false, Shift::Base),
                ("t", true, Shift::Base),
                (" / min", false, Shift::Base),
            ]),
            scale: Scale::Linear,
            low: 0.0,
            high: 20.0,
            ticks: ticks(&[0.0, 4.0, 8.0, 12.0, 16.0, 20.0], 0),
            minor: (0..=20).map(f64::from).collect(),
        },
        panels: vec![
            Panel {
                y: Axis {
                    title: label(&[
                        ("Level ", false, Shift::Base),
                        ("h", true, Shift::Base),
                        (" / m", false, Shift::Base),
                    ]),
                    scale: Scale::Linear,
                    low: 0.0,
                    high: 3.5,
                    ticks: ticks(&[0.0, 0.5, 1.0, 1.5, 2.0, 2.5, 3.0, 3.5], 1),
                    minor: Vec::new(),
                },
                series: vec![
                    series("valve open", levels(0.25), 0),
                    series("two thirds", levels(0.17), 1),
                    series("one third", levels(0.085), 2),
                ],
                levels: vec![Mark {
                    at: 0.45,
                    label: label(&[
                        ("h", true, Shift::Base),
                        ("low", false, Shift::Subscript),
                        (" = 0.45 m", false, Shift::Base),
                    ]),
                }],
                instants: instants.clone(),
            },
            Panel {
                y: Axis {
                    title: label(&[
                        ("Flow ", false, Shift::Base),
                        ("Q", true, Shift::Base),
                        ("o", true, Shift::Subscript),
                        (" / (L/s)", false, Shift::Base),
                    ]),
                    scale: Scale::Linear,
                    low: 40.0,
                    high: 70.0,
                    ticks: ticks(&[40.0, 50.0, 60.0, 70.0], 0),
                    minor: Vec::new(),
                },
                series: vec![
                    series("valve open", flow(0.25), 0),
                    series("two thirds", flow(0.17), 1),
                    series("one third", flow(0.085), 2),
                ],
                levels: Vec::new(),
                instants,
            },
        ],
    }
}

pub fn convergence() -> Plot {
    let (x_ticks, x_minor) = decades(-2, 1, 1);
    let (y_ticks, _) = decades(-10, -2, 2);
    let steps: Vec<f64> = (0..6).map(|i| 6.4 / f64::from(1 << i) * 0.1).collect();
    let points = |order: i32, scale: f64| -> Vec<(f64, f64)> {
        steps
            .iter()
            .map(|h| (*h, scale * crate::float::powi(*h, order)))
            .collect()
    };
    let series = |name: &str, points, style, markers| Series {
        label: words(name),
        points,
        style,
        line: true,
        markers,
    };
    Plot {
        x: Axis {
            title: label(&[
                ("Step ", false, Shift::Base),
                ("τ", true, Shift::Base),
                (" / min", false, Shift::Base),
            ]),
            scale: Scale::Logarithmic,
            low: 0.01,
            high: 10.0,
            ticks: x_ticks,
            minor: x_minor,
        },
        panels: vec![Panel {
            y: Axis {
                title: label(&[
                    ("Error of ", false, Shift::Base),
                    ("t", true, Shift::Base),
                    ("low", false, Shift::Subscript),
                    (" / min", false, Shift::Base),
                ]),
                scale: Scale::Logarithmic,
                low: 1e-10,
                high: 1e-2,
                ticks: y_ticks,
                minor: Vec::new(),
            },
            series: vec![
                series("Heun, order 2", points(2, 2e-3), 0, true),
                series("Classical, order 4", points(4, 3e-4), 1, true),
                series("slope 2", points(2, 2e-4), 4, false),
            ],
            levels: vec![Mark {
                at: 2e-9,
                label: words("target of the publication"),
            }],
            instants: Vec::new(),
        }],
    }
}

pub const SKETCH: &str = r##"<svg xmlns="http://www.w3.org/2000/svg" width="420" height="170" viewBox="0 0 420 170">
<rect x="60" y="20" width="200" height="120" fill="none" stroke="#1a2027" stroke-width="2"/>
<rect x="61" y="52" width="198" height="87" fill="#dbe8f4"/>
<path d="M60 52 H260" stroke="#0f4c81" stroke-width="1.5" stroke-dasharray="6 3"/>
<path d="M260 128 H330 M330 118 L350 138 L350 118 L330 138 Z M350 128 H400" fill="none" stroke="#1a2027" stroke-width="2"/>
<text x="70" y="46" font-family="Helvetica" font-size="12">h(t)</text>
<text x="318" y="110" font-family="Helvetica" font-size="12">V-17</text>
<text x="110" y="100" font-family="Helvetica" font-size="13">Break tank T-201</text>
</svg>"##;
