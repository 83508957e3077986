//! One readable function for each command: what happens, in order.
//!
//! Owns: the order of stages, and how their errors become one kind of failure. Does not own: any stage.

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

use crate::diagnostic::{self, Diagnostic};
use crate::evidence::{self, CaseEvidence};
use crate::judgement::{self, Verdict};
use crate::package::bag::{self, Bag, BagInfo, Payload};
use crate::package::digest::Digest;
use crate::package::{Limits, archive, name};
use crate::problem::model::Model;
use crate::problem::read::{self, MAX_BYTES};
use crate::problem::resolve::{self, NamedFiles};
use crate::record::block::{Figure, Picture};
use crate::record::{self, Delivery, Subject, data};
use crate::render::{self, PageStyle, RenderError, compose, markdown, pdf};
use crate::review::{self, recheck::Fault};
use crate::world::{self, FileError, Files, Mender, Staging};

use self::faults::{render_failure, true_at_start, unsolvable};
pub use self::packages::{contrast, recheck, recheck_all, register};

mod faults;
mod packages;

/// A problem that has been solved and judged; nothing has been written.
pub struct Trial {
    pub model: Model,
    pub warnings: Vec<Diagnostic>,
    pub cases: Vec<CaseEvidence>,
    pub verdict: Verdict,
    /// Texts for the excerpts of warnings.
    pub sources: BTreeMap<String, String>,
}

/// A package that stands on the disk.
pub struct Issued {
    pub trial: Trial,
    /// The folder or zip that was written.
    pub package: PathBuf,
    pub fingerprint: Digest,
    pub package_digest: Digest,
    /// The package's name differs from number and revision, which hold characters unfit for file names.
    pub respelled: bool,
}

/// Why nothing came of it.
#[derive(Debug)]
pub enum Failure {
    /// The problem file is at fault.
    Input {
        diagnostics: Vec<Diagnostic>,
        sources: BTreeMap<String, String>,
    },
    /// A package is not what it must be.
    Package { package: String, faults: Vec<Fault> },
    /// A file or folder is at fault, or the machine.
    File(FileError),
    /// The program is at fault.
    Bug(String),
}

impl Failure {
    /// Exit status of the process, as the README lists them.
    pub fn exit_status(&self) -> u8 {
        match self {
            Failure::Input { .. } => 2,
            Failure::Package { .. } => 3,
            Failure::File(error) if error.mender() == Mender::User => 2,
            Failure::File(_) => 4,
            Failure::Bug(_) => 70,
        }
    }
}

/// Largest file that a problem may name, in bytes.
const MAX_NAMED_FILE: u64 = 64 << 20;

/// Reads, solves and judges the problem file `problem`.
///
/// # Errors
/// Everything that is wrong with the input, at once.
pub fn trial(problem: &Path) -> Result<Trial, Failure> {
    let folder = problem
        .parent()
        .filter(|folder| !folder.as_os_str().is_empty())
        .unwrap_or(Path::new("."));
    let file = problem
        .file_name()
        .and_then(|name| name.to_str())
        .unwrap_or_default();
    let mut files = Files::below(folder).map_err(Failure::File)?;
    solve(&mut files, file)
}

/// Reads, solves and judges the problem called `file` among `files`.
///
/// # Errors
/// Everything that is wrong with the input, at once.
pub fn solve(files: &mut Files, file: &str) -> Result<Trial, Failure> {
    judged(open(files, file)?)
}

/// A problem that has been read and found valid; nothing has been solved.
struct Opened {
    model: Model,
    warnings: Vec<Diagnostic>,
    sources: BTreeMap<String, String>,
}

fn open(files: &mut Files, file: &str) -> Result<Opened, Failure> {
    let bytes = files
        .read(file, 2 * MAX_BYTES as u64)
        .map_err(Failure::File)?;
    let mut sources = BTreeMap::new();
    let text = String::from_utf8_lossy(&bytes).into_owned();
    sources.insert(file.to_owned(), text);
    let input = |diagnostics: Vec<Diagnostic>, sources: &BTreeMap<String, String>| Failure::Input {
        diagnostics,
        sources: sources.clone(),
    };

    let (text, section) = read::read(file, &bytes).map_err(|faults| input(faults, &sources))?;
    let named: NamedFiles = resolve::named_files(&section)
        .into_iter()
        .map(|name| {
            let bytes = files
                .read(&name, MAX_NAMED_FILE)
                .map(|bytes| bytes.to_vec())
                .map_err(|error| error.cause.to_string());
            (name, bytes)
        })
        .collect();
    let (model, warnings) = resolve::resolve(file, &text, &section, &named)
        .map_err(|faults| input(faults, &sources))?;
    Ok(Opened {
        model,
        warnings,
        sources,
    })
}

fn judged(opened: Opened) -> Result<Trial, Failure> {
    let Opened {
        model,
        warnings,
        sources,
    } = opened;
    let input = |diagnostics: Vec<Diagnostic>, sources: &BTreeMap<String, String>| Failure::Input {
        diagnostics,
        sources: sources.clone(),
    };
    let cases = evidence::gather(&model)
        .map_err(|(case, error)| input(vec![unsolvable(&model, case, &error)], &sources))?;
    let at_start: Vec<Diagnostic> = true_at_start(&model, &cases);
    if !at_start.is_empty() {
        return Err(input(at_start, &sources));
    }
    let verdict = judgement::judge(&model, &cases);
    Ok(Trial {
        model,
        warnings,
        cases,
        verdict,
        sources,
    })
}

/// results.json of a solved problem, as its package would hold it.
pub fn results_json(trial: &Trial) -> String {
    let subject = Subject {
        model: &trial.model,
        cases: &trial.cases,
        verdict: &trial.verdict,
    };
    data::results_json(
        &subject,
        &bag::content_fingerprint(&inputs(&trial.model)).to_string(),
    )
}

/// Everything that a package holds, before it is written.
pub struct Assembled {
    pub bag: Bag,
    pub folder_name: String,
    pub respelled: bool,
}

/// Sets a solved problem down as a package.
///
/// # Errors
/// A picture or character that no page can show; otherwise only our own bugs.
pub fn assemble(trial: &Trial) -> Result<Assembled, Failure> {
    let model = &trial.model;
    let subject = Subject {
        model,
        cases: &trial.cases,
        verdict: &trial.verdict,
    };
    let style = PageStyle::builtin().map_err(|error| render_failure(trial, error))?;
    let faces = render::face::Faces::load().map_err(|error| render_failure(trial, error))?;
    let mut payload: Payload = inputs(model);
    let inputs_digest = bag::content_fingerprint(&payload);
    payload.insert(
        "results/results.json".to_owned(),
        data::results_json(&subject, &inputs_digest.to_string()).into_bytes(),
    );
    payload.insert(
        "results/evidence.json".to_owned(),
        data::evidence_json(&subject).into_bytes(),
    );
    for case in &trial.cases {
        let path = format!("results/history-{}.csv", data::case_stem(model, case.case));
        payload.insert(path, data::history_csv(&subject, case).into_bytes());
    }
    let figures = record::figures(&subject);
    for figure in &figures {
        if let Some(svg) =
            figure_file(figure, &faces, &style).map_err(|error| render_failure(trial, error))?
        {
            payload.insert(figure.file.clone(), svg.into_bytes());
        }
    }
    payload.insert(
        "READ-ME.txt".to_owned(),
        record::read_me(&subject).into_bytes(),
    );

    // The record carries the content fingerprint, which covers everything but the record.
    let fingerprint = bag::content_fingerprint(&payload);
    let files = payload
        .iter()
        .map(|(path, bytes)| (path.clone(), bytes.len(), Digest::of(bytes).to_string()))
        .collect();
    let record = record::build(
        &subject,
        figures,
        &Delivery {
            fingerprint: fingerprint.prefixed(),
            files,
        },
    );
    let document = compose::compose(record, compose::TEMPLATE)
        .map_err(|error| Failure::Bug(error.to_string()))?;
    let page_file = pdf::write(&document, &style).map_err(|error| render_failure(trial, error))?;
    payload.insert(
        "record.md".to_owned(),
        markdown::write(&document).into_bytes(),
    );
    payload.insert("record.pdf".to_owned(), page_file);

    let folder = name::folder(
        &model.head.number,
        &model.head.revision,
        model.head.standing.word(),
        &fingerprint,
    );
    let bag = bag::build(payload, &bag_info(model), &Limits::WRITTEN).map_err(|faults| {
        let words: Vec<String> = faults.iter().map(ToString::to_string).collect();
        Failure::Input {
            diagnostics: vec![Diagnostic::new(&diagnostic::TOO_MANY, words.join("; "))],
            sources: BTreeMap::new(),
        }
    })?;
    Ok(Assembled {
        bag,
        folder_name: folder.name,
        respelled: folder.respelled,
    })
}

/// The problem file and every file that it names, as read; sketches and source documents once more as they were.
fn inputs(model: &Model) -> Payload {
    let mut payload = Payload::new();
    payload.insert(
        format!("inputs/{}", model.file),
        model.text.clone().into_bytes(),
    );
    for (name, bytes) in &model.files {
        payload.insert(format!("inputs/{name}"), bytes.clone());
    }
    for file in model.sketches.iter().chain(&model.attachments) {
        if let Some(bytes) = model.files.get(&file.file) {
            payload.insert(format!("attachments/{}", file.file), bytes.clone());
        }
    }
    payload
}

/// The SVG of a plot; a sketch is a file already.
fn figure_file(
    figure: &Figure,
    faces: &render::face::Faces,
    style: &PageStyle,
) -> Result<Option<String>, RenderError> {
    match &figure.picture {
        Picture::Sketch(_) => Ok(None),
        Picture::Plot(plot) => {
            let scene =
                render::figure::draw(plot, faces, style).map_err(|fault| RenderError::Plot {
                    file: figure.file.clone(),
                    fault,
                })?;
            Ok(Some(render::svg::write(&scene)))
        }
    }
}

fn bag_info(model: &Model) -> BagInfo {
    let one_line = |words: &str| words.split_whitespace().collect::<Vec<_>>().join(" ");
    let field = |label: &str, value: &str| (label.to_owned(), one_line(value));
    let mut fields = vec![
        field(review::NUMBER_FIELD, &model.head.number),
        field(review::TITLE_FIELD, &model.head.title),
        field(review::REVISION_FIELD, &model.head.revision),
        field(review::STANDING_FIELD, model.head.standing.word()),
        field(
            review::PROBLEM_FIELD,
            &review::recheck::problem_path(&model.file),
        ),
        field("Bag-Software-Agent", record::PROGRAM),
        field(
            review::DEPENDENCIES_FIELD,
            &Digest::of(include_bytes!("../Cargo.lock")).to_string(),
        ),
    ];
    if let Some(fingerprint) = &model.head.supersedes {
        fields.push(field(review::SUPERSEDES_FIELD, fingerprint));
    }
    BagInfo {
        fields,
        bagging_date: model.head.date.to_string(),
    }
}

/// Solves `problem` and writes its package as a folder below `into`, whole or not at all.
///
/// # Errors
/// A fault of the input, of a file or folder, or of the machine; nothing has been written then.
pub fn issue(problem: &Path, into: &Path) -> Result<Issued, Failure> {
    issue_as(Form::Folder, problem, into)
}

/// What a package is written as.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Form {
    Folder,
    Zip,
}

/// As `issue`, in the form that is wanted.
///
/// # Errors
/// As `issue`.
pub fn issue_as(form: Form, problem: &Path, into: &Path) -> Result<Issued, Failure> {
    let trial = trial(problem)?;
    let assembled = assemble(&trial)?;
    let package = match form {
        Form::Folder => write_folder(&assembled, into)?,
        Form::Zip => write_zip(&assembled, into)?,
    };
    Ok(Issued {
        trial,
        package,
        fingerprint: assembled.bag.content_fingerprint(),
        package_digest: assembled.bag.package_digest(),
        respelled: assembled.respelled,
    })
}

fn write_folder(assembled: &Assembled, into: &Path) -> Result<PathBuf, Failure> {
    let mut staging = Staging::beside(&into.join(&assembled.folder_name)).map_err(Failure::File)?;
    for (path, bytes) in assembled.bag.files() {
        staging.write(path, bytes).map_err(Failure::File)?;
    }
    staging.finish().map_err(Failure::File)
}

fn write_zip(assembled: &Assembled, into: &Path) -> Result<PathBuf, Failure> {
    let zip = archive::write(&assembled.folder_name, assembled.bag.files())
        .map_err(|fault| Failure::Bug(fault.to_string()))?;
    let destination = into.join(format!("{}.zip", assembled.folder_name));
    world::write_new(&destination, &zip).map_err(Failure::File)?;
    Ok(destination)
}
