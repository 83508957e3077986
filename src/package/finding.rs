//! What can be wrong with a package from a stranger: one typed finding, one line each.

use std::fmt;

use super::digest::{Digest, DigestFault};
use super::name::{NameFault, shown};

/// One thing that is wrong with a package; a package with any finding is not opened further.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Finding {
    Name { name: String, fault: NameFault },
    Clash { first: String, second: String },
    NameNotUtf8 { name: String },
    TooManyEntries { limit: usize },
    FileTooLarge { path: String, limit_bytes: u64 },
    TotalTooLarge { limit_bytes: u64 },
    Folder { path: String, fault: FolderFault },
    Archive(ArchiveFault),
    Bag(BagFault),
}

/// What is wrong with a folder on disk.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum FolderFault {
    RootIsLink,
    RootIsNeither,
    Unfinished,
    Link,
    HardLink,
    NotAFile,
    EmptyFolder,
    ChangedWhileRead,
}

/// What is wrong with a zip.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum ArchiveFault {
    NotAZip,
    Empty,
    Truncated,
    BytesBefore,
    BytesAfter,
    BytesBetween { before: String },
    SeveralDisks,
    Oversize,
    CountDiffers,
    Overlap { first: String, second: String },
    Encrypted { name: String },
    Compressed { name: String, method: u16 },
    Flags { name: String, flags: u16 },
    DeclaredSize { name: String },
    Special { name: String, kind: &'static str },
    ExtraFields { name: String },
    HeadersDiffer { name: String, field: &'static str },
    Checksum { name: String },
    Duplicate { name: String },
    OutsideTopFolder { name: String },
    TwoTopFolders { first: String, second: String },
    NotCanonical { offset: u64 },
}

/// What is wrong with the bag inside.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum BagFault {
    MissingTagFile {
        path: String,
    },
    ForeignTagFile {
        path: String,
    },
    UnlistedTagFile {
        path: String,
    },
    UnlistedPayload {
        path: String,
    },
    Fetch,
    ListedButMissing {
        path: String,
        by: &'static str,
    },
    DigestDiffers {
        path: String,
        listed: Digest,
        found: Digest,
    },
    NoPayload,
    Encoding {
        path: String,
        fault: EncodingFault,
    },
    Declaration,
    OtherVersion {
        version: String,
    },
    Line {
        file: &'static str,
        number: usize,
        fault: LineFault,
    },
    TooManyLines {
        file: &'static str,
        limit: usize,
    },
    NoFinalLineBreak {
        file: &'static str,
    },
    InfoMissing {
        label: &'static str,
    },
    InfoTwice {
        label: String,
    },
    BaggingDate,
    Oxum {
        listed: String,
        found: String,
    },
    PackageDigest {
        found: Digest,
    },
}

#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum EncodingFault {
    ByteOrderMark,
    Utf16,
    NotUtf8,
}

/// What is wrong with one line of a manifest or of bag-info.txt.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum LineFault {
    CarriageReturn,
    NoSeparator,
    Digest(DigestFault),
    EncodedPath,
    Name(NameFault),
    NotPayload,
    Payload,
    Signature,
    Duplicate,
    OutOfOrder,
    NoLabel,
    Folded,
    Value,
}

impl fmt::Display for Finding {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Finding::Name { name, fault } => write!(f, "{}: {fault}", shown(name)),
            Finding::Clash { first, second } => {
                write!(
                    f,
                    "{} and {} are one name on some systems",
                    shown(first),
                    shown(second)
                )
            }
            Finding::NameNotUtf8 { name } => write!(f, "{}: the name is not UTF-8", shown(name)),
            Finding::TooManyEntries { limit } => {
                write!(f, "the package has more than {limit} files and folders")
            }
            Finding::FileTooLarge { path, limit_bytes } => {
                write!(
                    f,
                    "{}: the file is larger than {limit_bytes} bytes",
                    shown(path)
                )
            }
            Finding::TotalTooLarge { limit_bytes } => {
                write!(f, "the package is larger than {limit_bytes} bytes")
            }
            Finding::Folder { path, fault } => write!(f, "{}: {fault}", shown(path)),
            Finding::Archive(fault) => fault.fmt(f),
            Finding::Bag(fault) => fault.fmt(f),
        }
    }
}

impl fmt::Display for FolderFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            FolderFault::RootIsLink => "the package is a link; name the folder or zip itself",
            FolderFault::RootIsNeither => "the package is neither a folder nor a file",
            FolderFault::Unfinished => {
                "the folder was left by an interrupted run and is no package"
            }
            FolderFault::Link => "a link; a package holds files only",
            FolderFault::HardLink => {
                "the file has a second name outside or inside the package (hard link)"
            }
            FolderFault::NotAFile => "neither a file nor a folder (pipe, socket or device)",
            FolderFault::EmptyFolder => "a folder without files, which no manifest can list",
            FolderFault::ChangedWhileRead => "the file was exchanged while it was read",
        })
    }
}

impl fmt::Display for ArchiveFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            ArchiveFault::NotAZip => f.write_str("the file is not a zip"),
            ArchiveFault::Empty => f.write_str("the zip has no entries"),
            ArchiveFault::Truncated => f.write_str("the zip is truncated"),
            ArchiveFault::BytesBefore => f.write_str("the zip has bytes before its first entry"),
            ArchiveFault::BytesAfter => {
                f.write_str("the zip has bytes after its end, or a comment")
            }
            ArchiveFault::BytesBetween { before } => {
                write!(f, "the zip has stray bytes before {}", shown(before))
            }
            ArchiveFault::SeveralDisks => f.write_str("the zip is one part of several"),
            ArchiveFault::Oversize => {
                f.write_str("the zip is of the 64-bit kind, larger than any package")
            }
            ArchiveFault::CountDiffers => {
                f.write_str("the zip declares another number of entries than it lists")
            }
            ArchiveFault::Overlap { first, second } => {
                write!(
                    f,
                    "the entries {} and {} overlap in the zip",
                    shown(first),
                    shown(second)
                )
            }
            ArchiveFault::Encrypted { name } => {
                write!(f, "{}: the entry is encrypted", shown(name))
            }
            ArchiveFault::Compressed { name, method } => {
                write!(
                    f,
                    "{}: compression method {method}; a package's zip only stores",
                    shown(name)
                )
            }
            ArchiveFault::Flags { name, flags } => {
                write!(
                    f,
                    "{}: the flags {flags:#06x} are not those of a package's zip",
                    shown(name)
                )
            }
            ArchiveFault::DeclaredSize { name } => {
                write!(
                    f,
                    "{}: the declared sizes do not agree with each other",
                    shown(name)
                )
            }
            ArchiveFault::Special { name, kind } => {
                write!(f, "{}: the entry is a {kind}, not a file", shown(name))
            }
            ArchiveFault::ExtraFields { name } => write!(
                f,
                "{}: the entry has extra fields or a comment",
                shown(name)
            ),
            ArchiveFault::HeadersDiffer { name, field } => {
                write!(
                    f,
                    "{}: local and central header differ in {field}",
                    shown(name)
                )
            }
            ArchiveFault::Checksum { name } => {
                write!(f, "{}: the CRC-32 does not match the content", shown(name))
            }
            ArchiveFault::Duplicate { name } => {
                write!(f, "{}: the name occurs twice in the zip", shown(name))
            }
            ArchiveFault::OutsideTopFolder { name } => {
                write!(f, "{}: the entry lies outside a top folder", shown(name))
            }
            ArchiveFault::TwoTopFolders { first, second } => {
                write!(
                    f,
                    "the zip has two top folders, {} and {}",
                    shown(first),
                    shown(second)
                )
            }
            ArchiveFault::NotCanonical { offset } => write!(
                f,
                "the zip differs at byte {offset} from the one written from its content; unpack it and recheck the folder"
            ),
        }
    }
}

impl fmt::Display for BagFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            BagFault::MissingTagFile { path } => write!(f, "{}: the file is missing", shown(path)),
            BagFault::ForeignTagFile { path } => {
                write!(f, "{}: no such file belongs into a package", shown(path))
            }
            BagFault::UnlistedTagFile { path } => {
                write!(
                    f,
                    "{}: the file is not listed in tagmanifest-sha256.txt",
                    shown(path)
                )
            }
            BagFault::UnlistedPayload { path } => {
                write!(
                    f,
                    "{}: the file is not listed in manifest-sha256.txt",
                    shown(path)
                )
            }
            BagFault::Fetch => {
                f.write_str("fetch.txt: a package is complete in itself and fetches nothing")
            }
            BagFault::ListedButMissing { path, by } => {
                write!(f, "{}: listed in {by}, but missing", shown(path))
            }
            BagFault::DigestDiffers {
                path,
                listed,
                found,
            } => {
                write!(
                    f,
                    "{}: the content was changed: listed {listed}, found {found}",
                    shown(path)
                )
            }
            BagFault::NoPayload => f.write_str("data: the package has no payload"),
            BagFault::Encoding { path, fault } => write!(f, "{}: {fault}", shown(path)),
            BagFault::Declaration => {
                f.write_str("bagit.txt: not the two lines of a BagIt 1.0 declaration")
            }
            BagFault::OtherVersion { version } => {
                write!(
                    f,
                    "bagit.txt: BagIt version {}; only 1.0 is read",
                    shown(version)
                )
            }
            BagFault::Line {
                file,
                number,
                fault,
            } => write!(f, "{file}, line {number}: {fault}"),
            BagFault::TooManyLines { file, limit } => write!(f, "{file}: more than {limit} lines"),
            BagFault::NoFinalLineBreak { file } => {
                write!(f, "{file}: the last line has no line break")
            }
            BagFault::InfoMissing { label } => write!(f, "bag-info.txt: {label} is missing"),
            BagFault::InfoTwice { label } => {
                write!(f, "bag-info.txt: {} occurs twice", shown(label))
            }
            BagFault::BaggingDate => {
                f.write_str("bag-info.txt: Bagging-Date is not a date YYYY-MM-DD")
            }
            BagFault::Oxum { listed, found } => {
                write!(
                    f,
                    "bag-info.txt: Payload-Oxum is {}, the payload has {found}",
                    shown(listed)
                )
            }
            BagFault::PackageDigest { found } => {
                write!(
                    f,
                    "bag-info.txt: Package-Digest is not that of manifest-sha256.txt, {found}"
                )
            }
        }
    }
}

impl fmt::Display for EncodingFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            EncodingFault::ByteOrderMark => "the file begins with a byte order mark",
            EncodingFault::Utf16 => "the file is UTF-16; tag files are UTF-8",
            EncodingFault::NotUtf8 => "the file is not UTF-8",
        })
    }
}

impl fmt::Display for LineFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            LineFault::Digest(fault) => return fault.fmt(f),
            LineFault::Name(fault) => return fault.fmt(f),
            LineFault::CarriageReturn => "the line holds a carriage return",
            LineFault::NoSeparator => "the line is not a digest, two spaces and a path",
            LineFault::EncodedPath => {
                "the path is encoded with `%`, which no name in a package needs"
            }
            LineFault::NotPayload => "the path does not lie in data/",
            LineFault::Payload => "a tag manifest lists no payload",
            LineFault::Signature => "a tag manifest lists no signature, which is made over it",
            LineFault::Duplicate => "the path is listed twice",
            LineFault::OutOfOrder => "the paths are not in byte order",
            LineFault::NoLabel => "the line is not a label, a colon, a space and a value",
            LineFault::Folded => "the line is folded; a package writes one line per field",
            LineFault::Value => {
                "the value is empty, padded or holds control or invisible characters"
            }
        })
    }
}
