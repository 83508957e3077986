//! The claim that the program stands on: where a band is claimed, the true error lies inside it.
//!
//! Every value of the reference cases, four methods, three coarse steps each. The rule and its figures are those of
//! the design: in at least 99.5 % of the values called asymptotic, order reduced, order irregular or at round-off,
//! and never more than three times outside; at least 97 % of oscillatory ones; median claimed over true error at most
//! 1.4 where asymptotic and 3.5 where reduced.

use std::fmt::Write;
use std::fs;
use std::path::{Path, PathBuf};

use crate::reference::{CASE_FILES, March, cases, ladder, ladders, solve};

const METHODS: &[&str] = &["euler", "heun", "rk4", "tr-bdf2"];
const STEPS: &[u32] = &[20, 60, 200];

/// Words under which a band is claimed without reserve.
const RELIED_ON: &[&str] = &[
    "asymptotic",
    "order reduced",
    "order irregular",
    "at round-off",
];

/// One reported value beside its reference.
struct Claim {
    what: String,
    method: &'static str,
    is_stiff: bool,
    word: &'static str,
    /// Distance of the reported value from the reference.
    error: f64,
    /// The reference cannot tell errors below this.
    allowance: f64,
    band: Option<f64>,
}

impl Claim {
    /// How far outside its band the error lies, as a multiple of the band; at most 1 is inside.
    fn reach(&self) -> f64 {
        let beyond = (self.error - self.allowance).max(0.0);
        match self.band {
            Some(band) if beyond <= band => beyond / band.max(f64::MIN_POSITIVE),
            Some(band) => beyond / band,
            None => 0.0,
        }
    }
}

fn claims() -> Vec<Claim> {
    let mut claims = Vec::new();
    for case in CASE_FILES.iter().flat_map(|file| cases(file)) {
        for method in METHODS {
            for steps in STEPS {
                let problem = case.problem(March {
                    method,
                    steps: *steps,
                    levels: 3,
                });
                let found = ladders(&problem.text);
                for expected in &problem.expected {
                    let ladder = &found[&expected.result];
                    let value = ladder.reported().filter(|value| value.is_finite());
                    claims.push(Claim {
                        what: format!(
                            "{} by {method} in {steps} steps, {}: {:?}, reference {:?}",
                            case.id, expected.what, ladder.values, expected.value
                        ),
                        method,
                        is_stiff: case.is_stiff(),
                        word: ladder.convergence.word(),
                        // A value that is absent or not finite is as wrong as can be.
                        error: value.map_or(f64::INFINITY, |value| (value - expected.value).abs()),
                        allowance: expected.allowance,
                        band: ladder.uncertainty,
                    });
                }
            }
        }
    }
    claims
}

/// Figures of the claims under one word.
struct Row {
    word: &'static str,
    count: usize,
    inside: usize,
    worst: f64,
    /// Median of claimed over true error, of the values whose error the reference can tell.
    median: Option<f64>,
}

fn table(claims: &[Claim]) -> Vec<Row> {
    let words = [
        "asymptotic",
        "order reduced",
        "order irregular",
        "at round-off",
        "oscillatory",
        "discrete",
        "not converged",
    ];
    words
        .into_iter()
        .map(|word| {
            let own: Vec<&Claim> = claims.iter().filter(|claim| claim.word == word).collect();
            let mut ratios: Vec<f64> = own
                .iter()
                .filter(|claim| claim.error > 3.0 * claim.allowance)
                .filter_map(|claim| Some(claim.band? / claim.error))
                .collect();
            ratios.sort_by(f64::total_cmp);
            Row {
                word,
                count: own.len(),
                inside: own
                    .iter()
                    .filter(|claim| claim.band.is_some() && claim.reach() <= 1.0)
                    .count(),
                worst: own.iter().map(|claim| claim.reach()).fold(0.0, f64::max),
                median: ratios.get(ratios.len() / 2).copied(),
            }
        })
        .collect()
}

fn printed(rows: &[Row]) -> String {
    let mut text = format!(
        "{:<16} {:>7} {:>9} {:>9} {:>15}\n",
        "convergence", "values", "inside", "worst", "median claimed"
    );
    for row in rows {
        let share = if row.count == 0 {
            100.0
        } else {
            100.0 * row.inside as f64 / row.count as f64
        };
        let (share, worst) = if row.word == "not converged" {
            ("no band".to_owned(), "-".to_owned())
        } else {
            (format!("{share:.2} %"), format!("{:.2}", row.worst))
        };
        let median = row
            .median
            .map_or("-".to_owned(), |median| format!("{median:.2}"));
        let _ = writeln!(
            text,
            "{:<16} {:>7} {share:>9} {worst:>9} {median:>15}",
            row.word, row.count
        );
    }
    text
}

/// How often a band is claimed at all, by method.
fn printed_by_method(claims: &[Claim]) -> String {
    let mut text = String::new();
    for method in METHODS {
        let share = |is_stiff: bool| {
            let own = || {
                claims
                    .iter()
                    .filter(|claim| claim.method == *method && claim.is_stiff == is_stiff)
            };
            format!(
                "{:>4} of {:>4}",
                own().filter(|claim| claim.band.is_some()).count(),
                own().count()
            )
        };
        let _ = writeln!(
            text,
            "{method:<10} claims a band for {} values that are not stiff, {} stiff ones",
            share(false),
            share(true)
        );
    }
    text
}

#[test]
fn val_true_error_lies_inside_the_claimed_band() {
    let claims = claims();
    let rows = table(&claims);
    println!("{}\n{}", printed(&rows), printed_by_method(&claims));
    let mut outside: Vec<&Claim> = claims.iter().filter(|claim| claim.reach() > 1.0).collect();
    outside.sort_by(|a, b| b.reach().total_cmp(&a.reach()));
    for claim in &outside {
        println!("{:.2}× {}: {}", claim.reach(), claim.word, claim.what);
    }
    let find = |word: &str| rows.iter().find(|row| row.word == word).expect("a row");
    let relied: Vec<&Row> = RELIED_ON.iter().map(|word| find(word)).collect();
    for row in &relied {
        assert!(
            row.inside as f64 >= 0.995 * row.count as f64,
            "{}: {} of {} inside",
            row.word,
            row.inside,
            row.count
        );
        assert!(
            row.worst <= 3.0,
            "{}: {:.1} times outside",
            row.word,
            row.worst
        );
    }
    let oscillatory = find("oscillatory");
    assert!(
        oscillatory.inside as f64 >= 0.97 * oscillatory.count as f64,
        "oscillatory: {} of {}",
        oscillatory.inside,
        oscillatory.count
    );
    for (word, most) in [("asymptotic", 1.4), ("order reduced", 3.5)] {
        let median = find(word).median.expect("values with an error that shows");
        assert!(median <= most, "{word}: median claimed/true {median:.2}");
    }
    assert!(
        find("asymptotic").count > 1_000,
        "too few values to say anything"
    );
}

/// Problems at which integration fails in known ways: a band holds the true value, or none is claimed.
///
/// The first lines of each file say `# true y_end = 0.37: why`.
#[test]
fn hand_values_that_cannot_be_trusted_are_called_so() {
    let mut misses = String::new();
    for (name, text) in untrusted() {
        let truths: Vec<(&str, f64)> = text.lines().filter_map(truth).collect();
        assert!(
            !truths.is_empty(),
            "{name}: the first line says `# true RESULT = VALUE: why`"
        );
        let (low, high) = (key(&text, "from"), key(&text, "to"));
        for method in METHODS {
            for steps in STEPS {
                let text = with_key(
                    &with_key(&text, "method", &format!("{method:?}")),
                    "step",
                    &format!("{:?}", (high - low) / f64::from(*steps)),
                );
                let trial = solve(&text);
                for (symbol, value) in &truths {
                    let ladder = ladder(&trial, symbol);
                    let error = (ladder.reported().unwrap_or(f64::INFINITY) - value).abs();
                    // Round-off of a few hundred steps is nobody's concern here.
                    let outside = ladder.uncertainty.is_some_and(|band| error > band + 1e-13);
                    if outside || ladder.is_absent() {
                        let word = ladder.convergence.word();
                        let _ = writeln!(
                            misses,
                            "{name} by {method} in {steps} steps: {symbol} is {word}, {:?} ± {:?}, true {value}",
                            ladder.values, ladder.uncertainty
                        );
                    }
                }
            }
        }
    }
    assert!(misses.is_empty(), "\n{misses}");
}

/// Name and text of each of these problems.
fn untrusted() -> Vec<(String, String)> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/it/problems/untrusted");
    let entries = fs::read_dir(folder).expect("the folder of problems");
    let mut paths: Vec<PathBuf> = entries
        .map(|entry| entry.expect("an entry").path())
        .collect();
    paths.sort();
    let read = |path: &PathBuf| {
        (
            path.file_name().unwrap_or_default().display().to_string(),
            fs::read_to_string(path).expect("a problem"),
        )
    };
    paths.iter().map(read).collect()
}

fn truth(line: &str) -> Option<(&str, f64)> {
    let (symbol, rest) = line.strip_prefix("# true ")?.split_once(" = ")?;
    Some((symbol, rest.split_once(": ")?.0.parse().expect("a number")))
}

/// The number at `name` in the file's march.
fn key(text: &str, name: &str) -> f64 {
    let line = text
        .lines()
        .find_map(|line| line.strip_prefix(&format!("{name} = ")));
    line.and_then(|value| value.parse().ok())
        .unwrap_or_else(|| panic!("no number {name}"))
}

fn with_key(text: &str, name: &str, value: &str) -> String {
    let replaced = |line: &str| {
        if line.starts_with(&format!("{name} = ")) {
            format!("{name} = {value}")
        } else {
            line.to_owned()
        }
    };
    text.lines().map(replaced).collect::<Vec<_>>().join("\n")
}

#[test]
fn hand_a_perfect_balance_is_no_accuracy() {
    // Forward Euler in five steps: what leaves the tank is what the outlet passes, to round-off, and the depth is wrong.
    let case = cases("engineering.json")
        .into_iter()
        .find(|case| case.id == "eng-tank-orifice")
        .expect("the tank");
    let problem = case.problem(March {
        method: "euler",
        steps: 5,
        levels: 3,
    });
    let trial = solve(&problem.text);
    for expected in problem
        .expected
        .iter()
        .filter(|expected| expected.what.starts_with("h at"))
    {
        let ladder = ladder(&trial, &expected.result);
        let error = (ladder.reported().expect("a depth") - expected.value).abs();
        let band = ladder.uncertainty.expect("a band");
        assert!(
            error > 0.005 && band >= error,
            "{}: error {error}, band {band}",
            expected.what
        );
    }
}
