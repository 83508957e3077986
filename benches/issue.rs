//! The whole issue of the demonstration, and each of its stages.
//!
//! In-process: start-up and the disk are left out, but for `issue`, which writes. CPU time and memory of the whole
//! process are measured by `.ci/cost.py`.

use std::hint::black_box;
use std::path::Path;

use countermarch::evidence;
use countermarch::judgement;
use countermarch::package::Limits;
use countermarch::package::bag::{self, BagInfo, Payload};
use countermarch::pipeline;
use countermarch::problem::read;
use countermarch::problem::resolve::{self, NamedFiles};
use countermarch::record::{self, Delivery, Subject, data};
use countermarch::render::face::Faces;
use countermarch::render::{PageStyle, compose, figure, markdown, pdf, svg};
use countermarch::world::Files;
use criterion::{BatchSize, Criterion, criterion_group, criterion_main};

const FOLDER: &str = concat!(env!("CARGO_MANIFEST_DIR"), "/demo-data/break-tank");
const FILE: &str = "break-tank.toml";

fn stages(criterion: &mut Criterion) {
    let problem = Path::new(FOLDER).join(FILE);
    let bytes = std::fs::read(&problem).expect("the demonstration");
    let (text, section) = read::read(FILE, &bytes).expect("a problem file");
    let named = |section: &read::Section| -> NamedFiles {
        let read = |name: String| {
            (
                name.clone(),
                Ok(std::fs::read(Path::new(FOLDER).join(name)).expect("a named file")),
            )
        };
        resolve::named_files(section)
            .into_iter()
            .map(read)
            .collect()
    };
    let files = named(&section);
    let (model, _) = resolve::resolve(FILE, &text, &section, &files).expect("a valid problem");
    let cases = evidence::gather(&model).expect("a problem that can be solved");
    let verdict = judgement::judge(&model, &cases);
    let subject = Subject {
        model: &model,
        cases: &cases,
        verdict: &verdict,
    };
    let trial = pipeline::trial(&problem).expect("a trial");
    let assembled = pipeline::assemble(&trial).expect("a package");
    let payload: Payload = assembled
        .bag
        .payload()
        .map(|(path, bytes)| (path.to_owned(), bytes.to_vec()))
        .collect();
    let style = PageStyle::builtin().expect("the page style");
    let set_down = || {
        let delivery = Delivery {
            fingerprint: assembled.bag.content_fingerprint().prefixed(),
            files: Vec::new(),
        };
        let record = record::build(&subject, record::figures(&subject), &delivery);
        compose::compose(record, compose::TEMPLATE).expect("a document")
    };
    let document = set_down();

    let mut group = criterion.benchmark_group("stage");
    group.bench_function("1 read and resolve", |bencher| {
        bencher.iter(|| {
            let (text, section) = read::read(FILE, black_box(&bytes)).expect("a problem file");
            resolve::resolve(FILE, &text, &section, &files).expect("a valid problem")
        });
    });
    group.bench_function("2 gather evidence", |bencher| {
        bencher.iter(|| evidence::gather(black_box(&model)).expect("a solution"))
    });
    group.bench_function("3 judge", |bencher| {
        bencher.iter(|| judgement::judge(black_box(&model), &cases))
    });
    group.bench_function("4 data files", |bencher| {
        bencher.iter(|| {
            let histories: Vec<String> = cases
                .iter()
                .map(|case| data::history_csv(&subject, case))
                .collect();
            (
                data::results_json(&subject, ""),
                data::evidence_json(&subject),
                record::read_me(&subject),
                histories,
            )
        });
    });
    group.bench_function("5 figures", |bencher| {
        bencher.iter(|| {
            let faces = Faces::load().expect("the typefaces");
            let scenes =
                record::figures(&subject)
                    .into_iter()
                    .filter_map(|figure| match figure.picture {
                        record::block::Picture::Plot(plot) => Some(svg::write(
                            &figure::draw(&plot, &faces, &style).expect("a plot"),
                        )),
                        record::block::Picture::Sketch(_) => None,
                    });
            scenes.collect::<Vec<String>>()
        });
    });
    group.bench_function("6 record and compose", |bencher| bencher.iter(set_down));
    group.bench_function("7 markdown", |bencher| {
        bencher.iter(|| markdown::write(black_box(&document)))
    });
    group.bench_function("8 pdf", |bencher| {
        bencher.iter(|| pdf::write(black_box(&document), &style).expect("pages"))
    });
    group.bench_function("9 bag", |bencher| {
        let info = || BagInfo {
            fields: Vec::new(),
            bagging_date: model.head.date.to_string(),
        };
        bencher.iter_batched(
            || payload.clone(),
            |payload| bag::build(payload, &info(), &Limits::WRITTEN).expect("a bag"),
            BatchSize::SmallInput,
        );
    });
    group.finish();
}

fn whole(criterion: &mut Criterion) {
    let problem = Path::new(FOLDER).join(FILE);
    let mut group = criterion.benchmark_group("whole");
    group.bench_function("trial", |bencher| {
        bencher.iter(|| {
            let mut files = Files::below(Path::new(FOLDER)).expect("the folder");
            pipeline::solve(&mut files, FILE).expect("a trial")
        });
    });
    group.sample_size(20);
    group.bench_function("issue", |bencher| {
        bencher.iter_batched(
            || tempfile::tempdir().expect("a folder"),
            |into| {
                pipeline::issue(&problem, into.path()).expect("a package");
                into
            },
            BatchSize::PerIteration,
        );
    });
    group.finish();
}

criterion_group!(benches, stages, whole);
criterion_main!(benches);
