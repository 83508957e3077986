use std::fs;
use std::io::ErrorKind;
use std::path::Path;

use super::*;
use crate::package::bag::{self, Bag, BagInfo};
use crate::package::digest::Digest;
use crate::package::finding::{Finding, FolderFault};
use crate::package::{Limits, archive};

const LIMIT_BYTES: u64 = 1 << 20;

fn folder() -> tempfile::TempDir {
    tempfile::tempdir().unwrap()
}

fn names_in(folder: &Path) -> Vec<String> {
    let mut names: Vec<String> = fs::read_dir(folder)
        .unwrap()
        .map(|entry| entry.unwrap().file_name().into_string().unwrap())
        .collect();
    names.sort();
    names
}

fn cause(result: Result<impl Sized, FileError>) -> Cause {
    result.err().expect("must be refused").cause
}

#[test]
fn prop_a_file_is_read_once() {
    let folder = folder();
    fs::create_dir(folder.path().join("tables")).unwrap();
    fs::write(folder.path().join("tables/level.csv"), "first").unwrap();
    let mut files = Files::below(folder.path()).unwrap();
    assert_eq!(
        *files.read("tables/level.csv", LIMIT_BYTES).unwrap(),
        *b"first"
    );
    fs::write(folder.path().join("tables/level.csv"), "second").unwrap();
    assert_eq!(
        *files.read("tables/level.csv", LIMIT_BYTES).unwrap(),
        *b"first"
    );
    assert_eq!(
        files.all_read().keys().collect::<Vec<_>>(),
        ["tables/level.csv"]
    );
}

#[test]
fn hand_reading_refuses_what_is_not_a_plain_file_below_the_folder() {
    let folder = folder();
    fs::create_dir(folder.path().join("below")).unwrap();
    fs::write(folder.path().join("large"), "12345").unwrap();
    fs::write(folder.path().join("outside"), "secret").unwrap();
    let mut files = Files::below(&folder.path().join("below")).unwrap();
    fs::write(folder.path().join("below/large"), "12345").unwrap();
    assert_eq!(
        cause(files.read("../outside", LIMIT_BYTES)),
        Cause::Name(NameFault::Parent)
    );
    assert_eq!(
        cause(files.read("/etc/hostname", LIMIT_BYTES)),
        Cause::Name(NameFault::Absolute)
    );
    assert_eq!(cause(files.read("absent", LIMIT_BYTES)), Cause::NotFound);
    assert_eq!(cause(files.read("large/x", LIMIT_BYTES)), Cause::NotAFolder);
    assert_eq!(
        cause(files.read("large", 4)),
        Cause::TooLarge { limit_bytes: 4 }
    );
    assert_eq!(files.read("large", 5).unwrap().len(), 5);
    assert_eq!(
        cause(files.read("large", 4)),
        Cause::TooLarge { limit_bytes: 4 }
    );
    assert_eq!(
        cause(Files::below(&folder.path().join("large"))),
        Cause::NotAFolder
    );
    assert_eq!(files.all_read().len(), 1);
}

#[test]
fn prop_enclosed_files_reach_no_disk() {
    let mut files = Files::enclosed([("a.toml", b"x".as_slice())]);
    assert_eq!(*files.read("a.toml", LIMIT_BYTES).unwrap(), *b"x");
    assert_eq!(
        cause(files.read("Cargo.toml", LIMIT_BYTES)),
        Cause::NotFound
    );
    assert_eq!(
        cause(files.read("a.toml", 0)),
        Cause::TooLarge { limit_bytes: 0 }
    );
}

#[test]
fn hand_who_can_mend_it() {
    for (kind, cause, mender) in [
        (ErrorKind::NotFound, Cause::NotFound, Mender::User),
        (ErrorKind::AlreadyExists, Cause::Exists, Mender::User),
        (ErrorKind::StorageFull, Cause::DiskFull, Mender::Machine),
        (ErrorKind::QuotaExceeded, Cause::DiskFull, Mender::Machine),
        (
            ErrorKind::PermissionDenied,
            Cause::PermissionDenied,
            Mender::Machine,
        ),
        (
            ErrorKind::ReadOnlyFilesystem,
            Cause::ReadOnly,
            Mender::Machine,
        ),
        (
            ErrorKind::TimedOut,
            Cause::Machine(ErrorKind::TimedOut),
            Mender::Machine,
        ),
    ] {
        let error = FileError::of(Path::new("a/b"), &kind.into());
        assert_eq!(
            (error.cause.clone(), error.mender()),
            (cause, mender),
            "{kind:?}"
        );
        assert!(error.to_string().starts_with("a/b: ") && !error.to_string().contains('\n'));
    }
}

#[test]
fn prop_a_package_appears_whole() {
    let folder = folder();
    let destination = folder.path().join("PS-101_A");
    let mut staging = Staging::beside(&destination).unwrap();
    let digest = staging.write("data/inputs/a.toml", b"abc").unwrap();
    staging.write("data/b", b"").unwrap();
    assert_eq!(digest, Digest::of(b"abc"));
    assert!(!destination.exists());
    assert_eq!(staging.finish().unwrap(), destination);
    assert_eq!(
        fs::read(destination.join("data/inputs/a.toml")).unwrap(),
        b"abc"
    );
    assert_eq!(names_in(folder.path()), ["PS-101_A"]);
    assert_eq!(names_in(&destination.join("data")), ["b", "inputs"]);
}

#[test]
fn prop_what_is_not_finished_vanishes() {
    let folder = folder();
    let mut staging = Staging::beside(&folder.path().join("PS-101_A")).unwrap();
    staging.write("data/a", b"abc").unwrap();
    assert_eq!(cause(staging.write("data/a", b"again")), Cause::Exists);
    assert_eq!(
        cause(staging.write("../a", b"")),
        Cause::Name(NameFault::Parent)
    );
    assert_eq!(names_in(folder.path()).len(), 1);
    drop(staging);
    assert_eq!(names_in(folder.path()), [""; 0]);
}

#[test]
fn prop_nothing_is_overwritten() {
    let folder = folder();
    let destination = folder.path().join("PS-101_A");
    let mut early = Staging::beside(&destination).unwrap();
    let mut late = Staging::beside(&destination).unwrap();
    early.write("a", b"early").unwrap();
    late.write("a", b"late").unwrap();
    early.finish().unwrap();
    assert_eq!(cause(late.finish()), Cause::Exists);
    assert_eq!(cause(Staging::beside(&destination)), Cause::Exists);
    assert_eq!(cause(write_new(&destination, b"")), Cause::Exists);
    assert_eq!(fs::read(destination.join("a")).unwrap(), b"early");
    assert_eq!(
        cause(Staging::beside(&folder.path().join("absent/PS-101_A"))),
        Cause::NotFound
    );
    assert_eq!(names_in(folder.path()), ["PS-101_A"]);
}

/// An empty folder is what a renaming would replace without a word.
#[test]
fn hand_an_empty_folder_or_file_that_came_in_between_stays() {
    let folder = folder();
    let destination = folder.path().join("PS-101_A");
    let staging = stage(&small_bag(), &destination);
    fs::create_dir(&destination).unwrap();
    assert_eq!(cause(staging.finish()), Cause::Exists);
    assert_eq!(names_in(&destination), [""; 0]);
    fs::remove_dir(&destination).unwrap();
    let staging = stage(&small_bag(), &destination);
    fs::write(&destination, "mine").unwrap();
    assert_eq!(cause(staging.finish()), Cause::Exists);
    assert_eq!(fs::read(&destination).unwrap(), b"mine");
    assert_eq!(names_in(folder.path()), ["PS-101_A"]);
}

#[test]
fn prop_a_new_file_appears_whole_and_once() {
    let folder = folder();
    let destination = folder.path().join("PS-101_A.zip");
    assert_eq!(write_new(&destination, b"abc").unwrap(), Digest::of(b"abc"));
    assert_eq!(cause(write_new(&destination, b"other")), Cause::Exists);
    assert_eq!(fs::read(&destination).unwrap(), b"abc");
    assert_eq!(names_in(folder.path()), ["PS-101_A.zip"]);
}

fn small_bag() -> Bag {
    let payload = [
        ("READ-ME.txt", "read me\n"),
        ("inputs/tank.toml", "format = 1\n"),
        ("record.md", "# Record\n"),
    ];
    let payload = payload
        .map(|(path, text)| (path.to_owned(), text.as_bytes().to_vec()))
        .into();
    let info = BagInfo {
        fields: vec![("Revision".into(), "A".into())],
        bagging_date: "2026-03-31".into(),
    };
    bag::build(payload, &info, &Limits::WRITTEN).unwrap()
}

fn stage(bag: &Bag, destination: &Path) -> Staging {
    let mut staging = Staging::beside(destination).unwrap();
    for (path, bytes) in bag.files() {
        assert_eq!(staging.write(path, bytes).unwrap(), Digest::of(bytes));
    }
    staging
}

fn read_bag(path: &Path) -> Bag {
    bag::read(read_package(path, &Limits::READ).unwrap(), &Limits::READ).unwrap()
}

#[test]
fn prop_a_bag_comes_back_from_folder_and_zip() {
    let folder = folder();
    let bag = small_bag();
    let package = stage(&bag, &folder.path().join("PS-101_A"))
        .finish()
        .unwrap();
    assert_eq!(read_bag(&package), bag);
    let zip = folder.path().join("PS-101_A.zip");
    write_new(&zip, &archive::write("PS-101_A", bag.files()).unwrap()).unwrap();
    assert_eq!(read_bag(&zip), bag);
}

/// GNU coreutils and grep: the two verifications by hand that the documents promise.
#[cfg(target_os = "linux")]
#[test]
fn val_sha256sum_agrees_with_a_written_bag() {
    use std::process::Command;
    let folder = folder();
    let bag = small_bag();
    let package = stage(&bag, &folder.path().join("PS-101_A"))
        .finish()
        .unwrap();
    let shell = |script: &str| {
        Command::new("sh")
            .current_dir(&package)
            .args(["-c", script])
            .output()
            .unwrap()
    };
    for manifest in [bag::MANIFEST, bag::TAG_MANIFEST] {
        let checked = shell(&format!("sha256sum --strict --quiet -c {manifest}"));
        assert!(checked.status.success(), "{checked:?}");
    }
    let by_hand = shell(r"grep -v '  data/record\.\(pdf\|md\)$' manifest-sha256.txt | sha256sum");
    let expected = format!("{}  -\n", bag.content_fingerprint());
    assert_eq!(String::from_utf8(by_hand.stdout).unwrap(), expected);
    fs::write(package.join("data/record.md"), "# Other\n").unwrap();
    assert!(
        !shell("sha256sum --strict --quiet -c manifest-sha256.txt")
            .status
            .success()
    );
}

fn read_findings(path: &Path, limits: &Limits) -> Vec<Finding> {
    match read_package(path, limits) {
        Ok(source) => source.findings,
        Err(OpenFault::Package(findings)) => findings,
        Err(OpenFault::File(error)) => panic!("{error}"),
    }
}

fn folder_finding(path: &str, fault: FolderFault) -> Finding {
    Finding::Folder {
        path: path.to_owned(),
        fault,
    }
}

#[test]
fn prop_an_ordinary_folder_is_read_whole() {
    let folder = folder();
    fs::create_dir_all(folder.path().join("data/inputs")).unwrap();
    fs::write(folder.path().join("data/inputs/a"), "abc").unwrap();
    fs::write(folder.path().join("b"), "").unwrap();
    let source = read_package(folder.path(), &Limits::READ).unwrap();
    assert_eq!(source.findings, []);
    let read: Vec<_> = source
        .files
        .iter()
        .map(|(path, bytes)| (path.as_str(), bytes.len()))
        .collect();
    assert_eq!(read, [("b", 0), ("data/inputs/a", 3)]);
}

#[test]
fn hand_limits_of_a_folder() {
    let folder = folder();
    for name in ["a", "b", "c"] {
        fs::write(folder.path().join(name), "12345").unwrap();
    }
    let limits = Limits {
        n_entries: 3,
        file_bytes: 5,
        total_bytes: 15,
    };
    assert_eq!(read_findings(folder.path(), &limits), []);
    let few = Limits {
        n_entries: 2,
        ..limits
    };
    assert_eq!(
        read_findings(folder.path(), &few),
        [Finding::TooManyEntries { limit: 2 }]
    );
    let small = Limits {
        total_bytes: 14,
        ..limits
    };
    assert_eq!(
        read_findings(folder.path(), &small),
        [Finding::TotalTooLarge { limit_bytes: 14 }]
    );
    let short = Limits {
        file_bytes: 4,
        ..limits
    };
    let too_large = |path: &str| Finding::FileTooLarge {
        path: path.to_owned(),
        limit_bytes: 4,
    };
    assert_eq!(
        read_findings(folder.path(), &short),
        ["a", "b", "c"].map(too_large)
    );
}

#[test]
fn hand_a_zip_over_the_limit_is_not_read() {
    let folder = folder();
    let zip = folder.path().join("a.zip");
    fs::write(&zip, vec![0; 2000]).unwrap();
    let limits = Limits {
        n_entries: 1,
        file_bytes: 10,
        total_bytes: 10,
    };
    assert_eq!(
        read_findings(&zip, &limits),
        [Finding::TotalTooLarge { limit_bytes: 1034 }]
    );
}

#[test]
fn hand_an_interrupted_run_leaves_no_package() {
    let folder = folder();
    let staging = stage(&small_bag(), &folder.path().join("PS-101_A"));
    let left = folder.path().join(&names_in(folder.path())[0]);
    let findings = read_findings(&left, &Limits::READ);
    assert!(
        matches!(
            findings[..],
            [Finding::Folder {
                fault: FolderFault::Unfinished,
                ..
            }]
        ),
        "{findings:?}"
    );
    let with_slash = left.join("");
    assert_eq!(read_findings(&with_slash, &Limits::READ), findings);

    // Nothing but its name tells it from a package.
    staging.finish().unwrap();
    assert_eq!(read_bag(&folder.path().join("PS-101_A")), small_bag());
}

#[test]
fn hand_an_empty_folder_is_found() {
    let folder = folder();
    fs::create_dir_all(folder.path().join("data/empty")).unwrap();
    let expected = folder_finding("data/empty", FolderFault::EmptyFolder);
    assert_eq!(read_findings(folder.path(), &Limits::READ), [expected]);
}

#[cfg(unix)]
mod unix {
    use std::ffi::OsStr;
    use std::os::unix::ffi::OsStrExt;
    use std::os::unix::fs::symlink;
    use std::os::unix::net::UnixListener;
    use std::process::Command;
    use std::sync::mpsc;
    use std::time::Duration;

    use super::*;

    #[test]
    fn hand_links_are_not_followed() {
        let folder = folder();
        let root = folder.path().join("package");
        fs::create_dir_all(root.join("data")).unwrap();
        fs::create_dir(folder.path().join("outside")).unwrap();
        fs::write(folder.path().join("outside/secret"), "secret").unwrap();
        symlink("../../outside/secret", root.join("data/to-file")).unwrap();
        symlink("../../outside", root.join("data/to-folder")).unwrap();
        symlink("nowhere", root.join("data/to-nothing")).unwrap();
        let source = read_package(&root, &Limits::READ).unwrap();
        let link = |path| folder_finding(path, FolderFault::Link);
        assert_eq!(
            source.findings,
            ["data/to-file", "data/to-folder", "data/to-nothing"].map(link)
        );
        assert!(source.files.is_empty());

        let mut files = Files::below(&root).unwrap();
        assert_eq!(cause(files.read("data/to-file", LIMIT_BYTES)), Cause::Link);
        assert_eq!(
            cause(files.read("data/to-folder/secret", LIMIT_BYTES)),
            Cause::Link
        );
    }

    #[test]
    fn hand_a_root_that_is_a_link() {
        let folder = folder();
        fs::create_dir(folder.path().join("package")).unwrap();
        symlink("package", folder.path().join("link")).unwrap();
        let expected = [folder_finding("link", FolderFault::RootIsLink)];
        for name in ["link", "link/", "link/."] {
            assert_eq!(
                read_findings(&folder.path().join(name), &Limits::READ),
                expected,
                "{name}"
            );
        }
        symlink("nowhere", folder.path().join("taken")).unwrap();
        assert_eq!(
            cause(Staging::beside(&folder.path().join("taken"))),
            Cause::Exists
        );
    }

    #[test]
    fn hand_hard_links() {
        let folder = folder();
        let root = folder.path().join("package");
        fs::create_dir(&root).unwrap();
        fs::write(folder.path().join("outside"), "x").unwrap();
        fs::hard_link(folder.path().join("outside"), root.join("inside")).unwrap();
        let expected = [folder_finding("inside", FolderFault::HardLink)];
        assert_eq!(read_findings(&root, &Limits::READ), expected);
    }

    #[test]
    fn hand_pipes_and_sockets_do_not_make_it_wait() {
        let folder = folder();
        let pipe = folder.path().join("pipe");
        assert!(
            Command::new("mkfifo")
                .arg(&pipe)
                .status()
                .unwrap()
                .success()
        );
        let _listener = UnixListener::bind(folder.path().join("socket")).unwrap();
        let (send, receive) = mpsc::channel();
        let root = folder.path().to_owned();
        std::thread::spawn(move || {
            let as_root = read_findings(&root.join("pipe"), &Limits::READ);
            let as_input = cause(Files::below(&root).unwrap().read("pipe", LIMIT_BYTES));
            send.send((read_findings(&root, &Limits::READ), as_root, as_input))
                .unwrap();
        });
        let (inside, as_root, as_input) = receive
            .recv_timeout(Duration::from_secs(20))
            .expect("it waits");
        assert_eq!(
            inside,
            ["pipe", "socket"].map(|path| folder_finding(path, FolderFault::NotAFile))
        );
        assert_eq!(
            as_root,
            [folder_finding("pipe", FolderFault::RootIsNeither)]
        );
        assert_eq!(as_input, Cause::NotAFile);
    }

    #[cfg(target_os = "linux")]
    #[test]
    fn hand_names_that_are_not_utf8() {
        let folder = folder();
        fs::write(folder.path().join(OsStr::from_bytes(b"a\xffb")), "").unwrap();
        let expected = Finding::NameNotUtf8 {
            name: "a\\xffb".to_owned(),
        };
        assert_eq!(read_findings(folder.path(), &Limits::READ), [expected]);
    }

    /// No user makes folders in `/sys`, not even the superuser, whom no mode would stop elsewhere.
    #[cfg(target_os = "linux")]
    #[test]
    fn hand_an_unwritable_folder_is_the_machines_fault() {
        for error in [
            Staging::beside(Path::new("/sys/PS-101_A")).err(),
            write_new(Path::new("/sys/PS-101_A.zip"), b"").err(),
        ] {
            let error = error.expect("must be refused");
            assert_eq!(error.mender(), Mender::Machine);
            assert!(
                matches!(error.cause, Cause::PermissionDenied | Cause::ReadOnly),
                "{error}"
            );
        }
    }
}
