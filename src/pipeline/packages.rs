//! What happens to packages that were issued, maybe by strangers: recheck, contrast, register.

use std::collections::BTreeMap;
use std::path::Path;

use super::{Failure, Trial, assemble, bag_info, inputs, judged, open, results_json};
use crate::diagnostic::{Diagnostic, Place};
use crate::package::Limits;
use crate::package::bag::{self, Bag};
use crate::package::finding::Finding;
use crate::problem::read::{self, Section};
use crate::review::contrast::{self, Contrast, Side, Statement};
use crate::review::recheck::{self, Fault, Note, Recheck};
use crate::review::register::{self, Entry, Register};
use crate::review::results::{self, Results};
use crate::review::work;
use crate::world::{self, FileError, Files, Mender, OpenFault};

const PROGRAM: &str = env!("CARGO_PKG_NAME");
const VERSION: &str = env!("CARGO_PKG_VERSION");

/// Reads `package`, solves its enclosed inputs again if that takes at most `allowed_work` operations, and
/// compares; the report holds everything found.
///
/// # Errors
/// Only what is not the package's fault: a name that stands for nothing, the machine, a bug of ours.
pub fn recheck(package: &Path, allowed_work: u64) -> Result<Recheck, Failure> {
    let mut report = Recheck::of(&package.display().to_string());
    let outcome = open_package(package).and_then(|bag| {
        report.identify(&bag);
        let stated = stated_results(&bag)?;
        report.made_by = Some(stated.program.version.clone());
        report.finding = Some(stated.finding.clone());
        let trial = solve_again(&bag, allowed_work)?;
        compare(&mut report, &bag, &stated, &trial)
    });
    match outcome {
        Ok(()) => Ok(report),
        Err(Failure::Package { faults, .. }) => {
            report.faults.extend(faults);
            Ok(report)
        }
        Err(other) => Err(other),
    }
}

/// Rechecks many packages on all processors and hands each outcome to `sink` in the order of the packages.
pub fn recheck_all<P: AsRef<Path> + Sync>(
    packages: &[P],
    allowed_work: u64,
    mut sink: impl FnMut(&Path, Result<Recheck, Failure>),
) {
    let mut named = packages.iter();
    let work = |package: &P| recheck(package.as_ref(), allowed_work);
    world::in_order(packages, world::processors(), work, |outcome| {
        let outcome =
            outcome.unwrap_or_else(|_| Err(Failure::Bug("it stopped in a recheck".to_owned())));
        if let Some(package) = named.next() {
            sink(package.as_ref(), outcome);
        }
    });
}

/// Compares what two packages state and found.
///
/// # Errors
/// A package that is not intact, or whose problem file this version cannot read.
pub fn contrast(old: &Path, new: &Path) -> Result<Contrast, Failure> {
    let (old, new) = (Stated::read(old)?, Stated::read(new)?);
    Ok(contrast::contrast(&old.side()?, &new.side()?))
}

/// Lists the packages at and below `folder`; `is_full` hashes every file of each, otherwise only what is read.
///
/// # Errors
/// A folder that cannot be looked into.
pub fn register(folder: &Path, is_full: bool) -> Result<Register, Failure> {
    let tree = world::packages_below(folder).map_err(Failure::File)?;
    let mut register = Register::default();
    let work = |package: &std::path::PathBuf| {
        let shown = package
            .strip_prefix(folder)
            .unwrap_or(package)
            .display()
            .to_string();
        let shown = if shown.is_empty() {
            ".".to_owned()
        } else {
            shown
        };
        entry(package, &shown, is_full)
    };
    world::in_order(
        &tree.packages,
        world::processors(),
        work,
        |outcome| match outcome {
            Ok(Ok(entry)) => register.entries.push(entry),
            Ok(Err(error)) => register.remarks.push(error.to_string()),
            Err(_) => register
                .remarks
                .push("a package was left out by a bug of the program".to_owned()),
        },
    );
    register
        .remarks
        .extend(tree.unreadable.iter().map(ToString::to_string));
    if tree.n_other_zips > 0 {
        let line = format!("{} other zip files are no packages", tree.n_other_zips);
        register.remarks.push(line);
    }
    Ok(register)
}

fn entry(package: &Path, shown: &str, is_full: bool) -> Result<Entry, FileError> {
    let limits = &Limits::READ;
    let read = if is_full {
        world::read_package(package, limits)
    } else {
        world::read_part(package, &register::GLANCED, limits)
    };
    let source = match read {
        Ok(source) => source,
        Err(OpenFault::Package(findings)) => return Ok(Entry::broken(shown, &findings)),
        Err(OpenFault::File(error)) => return Err(error),
    };
    let entry = if is_full {
        bag::read(source, limits).map(|bag| Entry::of_bag(shown, &bag))
    } else {
        bag::glance(source, limits).map(|glance| Entry::of_glance(shown, &glance))
    };
    Ok(entry.unwrap_or_else(|findings| Entry::broken(shown, &findings)))
}

fn open_package(package: &Path) -> Result<Bag, Failure> {
    let limits = &Limits::READ;
    let refused = |findings: Vec<Finding>| {
        let faults = findings.into_iter().map(Fault::Package).collect();
        package_failure(package, faults)
    };
    let source = world::read_package(package, limits).map_err(|fault| match fault {
        OpenFault::Package(findings) => refused(findings),
        OpenFault::File(error) => Failure::File(error),
    })?;
    bag::read(source, limits).map_err(refused)
}

fn package_failure(package: &Path, faults: Vec<Fault>) -> Failure {
    Failure::Package {
        package: package.display().to_string(),
        faults,
    }
}

/// A fault found in a package that is already named.
fn fault(fault: Fault) -> Failure {
    package_failure(Path::new(""), vec![fault])
}

fn stated_results(bag: &Bag) -> Result<Results, Failure> {
    let mut payload = bag.payload();
    let bytes = payload.find(|(path, _)| *path == results::PATH);
    let stated = Results::parse(bytes.map(|(_, bytes)| bytes))
        .map_err(|found| fault(Fault::Results(found)))?;
    if stated.program.name != PROGRAM {
        let name = stated.program.name;
        return Err(fault(Fault::OtherProgram { name }));
    }
    Ok(stated)
}

/// Solves the enclosed problem from the enclosed inputs alone.
fn solve_again(bag: &Bag, allowed_work: u64) -> Result<Trial, Failure> {
    let enclosed = recheck::enclosed(bag).map_err(fault)?;
    let mut files = Files::enclosed(enclosed.files.iter().copied());
    let opened = open(&mut files, &enclosed.problem)
        .map_err(|failure| refused_input(&enclosed.problem, failure))?;
    let work = work::of(&opened.model).ceil() as u64;
    if work > allowed_work {
        let allowed = allowed_work;
        return Err(fault(Fault::OverBudget { work, allowed }));
    }
    judged(opened).map_err(|failure| refused_input(&enclosed.problem, failure))
}

fn compare(
    report: &mut Recheck,
    bag: &Bag,
    stated: &Results,
    trial: &Trial,
) -> Result<(), Failure> {
    let is_own_version = stated.program.version == VERSION;
    let n_before = report.faults.len();
    if is_own_version {
        let again = assemble(trial).map_err(|failure| refused_input(&trial.model.file, failure))?;
        recheck::bytes(report, bag, &again.bag);
    } else {
        let version = stated.program.version.clone();
        report.notes.push(Note::OtherVersion { version });
        recheck::inputs(report, bag, &inputs(&trial.model), &bag_info(&trial.model));
    }
    // Equal bytes say it all.
    if !is_own_version || report.faults.len() > n_before {
        let again = Results::parse(Some(results_json(trial).as_bytes()))
            .map_err(|error| Failure::Bug(error.to_string()))?;
        let (agreement, faults) = recheck::agreement(stated, &again);
        report.agreement = Some(agreement);
        report.faults.extend(faults);
    }
    Ok(())
}

/// A problem that is refused is a fault of its package; the machine and bugs of ours are not.
fn refused_input(file: &str, failure: Failure) -> Failure {
    match failure {
        Failure::Input {
            diagnostics,
            sources,
        } => {
            let faults = diagnostics
                .iter()
                .filter(|diagnostic| !diagnostic.code.is_warning());
            let faults = faults.map(|diagnostic| input_fault(file, diagnostic, &sources));
            package_failure(Path::new(""), faults.collect())
        }
        Failure::File(error) if error.mender() == Mender::User => fault(Fault::Input {
            file: file.to_owned(),
            line: None,
            message: error.to_string(),
        }),
        other => other,
    }
}

fn input_fault(file: &str, diagnostic: &Diagnostic, sources: &BTreeMap<String, String>) -> Fault {
    let line_of = |place: &Place| {
        let before = sources.get(&place.file)?.get(..place.start)?;
        Some(1 + before.matches('\n').count())
    };
    let place = diagnostic.place.as_ref();
    Fault::Input {
        file: place.map_or(file, |place| place.file.as_str()).to_owned(),
        line: place.and_then(line_of),
        message: format!("{} ({})", diagnostic.message, diagnostic.code.id),
    }
}

/// An intact package whose problem file has been read; nothing was solved.
struct Stated {
    bag: Bag,
    package: String,
    problem: String,
    section: Section,
}

impl Stated {
    fn read(package: &Path) -> Result<Stated, Failure> {
        let named = |failure: Failure| match failure {
            Failure::Package { faults, .. } => package_failure(package, faults),
            other => other,
        };
        let bag = open_package(package)?;
        let enclosed = recheck::enclosed(&bag).map_err(fault).map_err(named)?;
        let problem = enclosed.problem.clone();
        let bytes = enclosed
            .files
            .iter()
            .find(|(path, _)| *path == problem)
            .map_or(&[][..], |(_, bytes)| bytes);
        let (_, section) = read::read(&problem, bytes).map_err(|diagnostics| {
            let sources =
                BTreeMap::from([(problem.clone(), String::from_utf8_lossy(bytes).into_owned())]);
            named(refused_input(
                &problem,
                Failure::Input {
                    diagnostics,
                    sources,
                },
            ))
        })?;
        let package = package.display().to_string();
        Ok(Stated {
            bag,
            package,
            problem,
            section,
        })
    }

    fn side(&self) -> Result<Side<'_>, Failure> {
        let named = |failure: Failure| match failure {
            Failure::Package { faults, .. } => package_failure(Path::new(&self.package), faults),
            other => other,
        };
        let enclosed = recheck::enclosed(&self.bag).map_err(fault).map_err(named)?;
        let files = enclosed
            .files
            .into_iter()
            .filter(|(path, _)| *path != self.problem);
        Ok(Side {
            bag: &self.bag,
            statement: Statement {
                section: &self.section,
                files: files.collect(),
            },
            results: stated_results(&self.bag).map_err(named)?,
        })
    }
}
