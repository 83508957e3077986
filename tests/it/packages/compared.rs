//! Packages beside each other: contrast and register.

use super::*;

#[test]
fn hand_a_contrast_says_what_changed_and_what_it_did() {
    let (desk, packages) = issued(&[]);
    let arguments = [
        "contrast",
        text(&packages[0]),
        text(&packages[1]),
        "--markdown",
        "contrast.md",
    ];
    let output = desk.run(&arguments);
    assert_eq!(status(&output), 0, "{}", standard_error(&output));
    let terminal = said(&output);
    assert!(
        terminal.starts_with("Finding: not supported; before: supported\n"),
        "{terminal}"
    );
    for words in ["K1", "not met", "t_alarm", "apart", "input A_t", "15.0 m^2"] {
        assert!(terminal.contains(words), "{words}:\n{terminal}");
    }
    let markdown = fs::read_to_string(desk.path("contrast.md")).expect("the file");
    assert!(
        markdown.starts_with("# Contrast of HS-217-CAL-004 revision B"),
        "{markdown}"
    );
    assert!(
        markdown.contains("| input A\\_t | value | 15.0 m^2 |"),
        "{markdown}"
    );
    assert_eq!(
        status(&desk.run(&arguments)),
        2,
        "a file is never overwritten"
    );

    let output = desk.run(&["contrast", text(&packages[0]), text(&packages[0])]);
    assert!(
        said(&output).contains("0 changes in what is calculated"),
        "{}",
        said(&output)
    );
    assert!(said(&output).starts_with("Finding: supported, as before\n"));
}

#[test]
fn hand_a_register_flags_what_no_longer_stands() {
    let (desk, packages) = issued(&[]);
    let bag = bag_of(&packages[0]);
    let fingerprint = bag.content_fingerprint().prefixed();
    let below = desk.path("out/deep/er");
    forge(&packages[0], &below.join("newer"), |payload, fields| {
        payload.insert("figures/more.svg".to_owned(), b"x".to_vec());
        fields[2].1 = "C".to_owned();
        fields.push(("Calculation-Supersedes".to_owned(), fingerprint.clone()));
    });
    copy(&packages[1], &below.join("broken"));
    fs::write(below.join("broken/bag-info.txt"), "x").expect("the damage");
    copy(&packages[1], &below.join("worn"));
    fs::write(below.join("worn/data/record.md"), "x").expect("the damage");
    fs::create_dir(below.join(".N_A.1-0.unfinished")).expect("a folder");
    fs::write(below.join("other.zip"), "PK").expect("a file");

    let output = desk.run(&[
        "register",
        "out",
        "--csv",
        "register.csv",
        "--markdown",
        "register.md",
    ]);
    assert_eq!(status(&output), 3);
    assert!(
        said(&output).contains("6 packages, 2 broken (tag files and results read)"),
        "{}",
        said(&output)
    );
    assert!(standard_error(&output).contains("1 other zip files are no packages"));
    let csv = fs::read_to_string(desk.path("register.csv")).expect("the file");
    let row = |package: &str| {
        csv.lines()
            .find(|line| line.ends_with(package))
            .unwrap_or_else(|| panic!("{package}:\n{csv}"))
    };
    assert!(
        row(",HS-217-CAL-004_B").contains("HS-217-CAL-004 C,superseded,"),
        "{csv}"
    );
    assert!(
        row("newer").starts_with("HS-217-CAL-004,C,issued,supported,"),
        "{csv}"
    );
    assert!(row("broken").contains("broken: "), "{csv}");
    assert!(
        row(".unfinished").contains("left by an interrupted run"),
        "{csv}"
    );
    assert!(
        !row("worn").contains("broken"),
        "a quick look reads no record"
    );
    let output = desk.run(&["register", "out", "--full"]);
    assert!(
        said(&output).contains("6 packages, 3 broken (every file hashed)"),
        "{}",
        said(&output)
    );
}

#[test]
fn prop_a_register_of_many_is_quick() {
    const MANY: usize = 500;
    let (desk, packages) = issued(&[]);
    let bag = bag_of(&packages[0]);
    for index in 0..MANY {
        let folder = desk.path(&format!("many/{index:05}"));
        write(bag.files(), &folder);
    }
    let start = std::time::Instant::now();
    let output = desk.run(&["register", "many"]);
    let elapsed = start.elapsed();
    assert_eq!(status(&output), 0, "{}", standard_error(&output));
    assert!(said(&output).contains(&format!("{MANY} packages, 0 broken")));
    println!(
        "register: {:.0} packages a second",
        MANY as f64 / elapsed.as_secs_f64()
    );
    // 10,000 in 20 s at worst, with a build that is not optimised.
    assert!(elapsed.as_secs_f64() < MANY as f64 / 500.0, "{elapsed:?}");
}
