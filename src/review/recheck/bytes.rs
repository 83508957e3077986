//! The comparison that leaves no doubt: every payload file and field as this version writes them.

use std::collections::{BTreeMap, BTreeSet};

use super::{Fault, Note, Recheck};
use crate::package::bag::{Bag, BagInfo, Payload};
use crate::review::{
    DATE_FIELD, DEPENDENCIES_FIELD, NUMBER_FIELD, REVISION_FIELD, STANDING_FIELD, TITLE_FIELD,
    field,
};

/// Fields that follow from the payload, which is compared itself; the bag's reader has checked them.
const FOLLOW_FROM_PAYLOAD: [&str; 2] = ["Payload-Oxum", "Package-Digest"];
/// Folders of a package whose files are copied, and so are the same whatever version made it.
const COPIED: [&str; 2] = ["inputs/", "attachments/"];
/// Fields that say the same in every version.
const IDENTITY: [&str; 4] = [NUMBER_FIELD, TITLE_FIELD, REVISION_FIELD, STANDING_FIELD];

/// Compares every payload file and every field of bag-info.txt with the package made again from the inputs.
pub fn bytes(recheck: &mut Recheck, found: &Bag, again: &Bag) {
    compare_files(
        recheck,
        found.payload().collect(),
        again.payload().collect(),
    );
    let labels: BTreeSet<&str> = [found, again]
        .iter()
        .flat_map(|bag| bag.info())
        .map(|(label, _)| label.as_str())
        .filter(|label| !FOLLOW_FROM_PAYLOAD.contains(label))
        .collect();
    for label in labels {
        let (listed, expected) = (field(found.info(), label), field(again.info(), label));
        // The payload shows whether another build computes the same.
        if label == DEPENDENCIES_FIELD && listed.is_some() && listed != expected {
            recheck.notes.push(Note::OtherDependencies);
        } else {
            compare_field(recheck, label, listed, expected);
        }
    }
}

/// Compares only what is alike in every version: inputs, attachments, and what bag-info.txt says of the calculation.
pub fn inputs(recheck: &mut Recheck, found: &Bag, again: &Payload, info: &BagInfo) {
    let is_copied =
        |(path, _): &(&str, &[u8])| COPIED.iter().any(|folder| path.starts_with(folder));
    let again = again
        .iter()
        .map(|(path, bytes)| (path.as_str(), bytes.as_slice()));
    compare_files(
        recheck,
        found.payload().filter(is_copied).collect(),
        again.filter(is_copied).collect(),
    );
    for label in IDENTITY {
        let (listed, expected) = (field(found.info(), label), field(&info.fields, label));
        compare_field(recheck, label, listed, expected);
    }
    let listed = field(found.info(), DATE_FIELD);
    compare_field(recheck, DATE_FIELD, listed, Some(&info.bagging_date));
}

fn compare_field(recheck: &mut Recheck, label: &str, found: Option<&str>, expected: Option<&str>) {
    if found != expected {
        recheck.faults.push(Fault::Field {
            label: label.to_owned(),
            found: found.map(str::to_owned),
            expected: expected.map(str::to_owned),
        });
    }
}

fn compare_files(
    recheck: &mut Recheck,
    found: BTreeMap<&str, &[u8]>,
    again: BTreeMap<&str, &[u8]>,
) {
    let paths: BTreeSet<&str> = found.keys().chain(again.keys()).copied().collect();
    for path in paths {
        recheck.n_compared += 1;
        let named = path.to_owned();
        match (found.get(path), again.get(path)) {
            (Some(found), Some(again)) => {
                if let Some(offset) = first_difference(found, again) {
                    let line = line_of(found, offset);
                    recheck.faults.push(Fault::Differs {
                        path: named,
                        offset,
                        line,
                    });
                }
            }
            (None, _) => recheck.faults.push(Fault::Missing { path: named }),
            (_, None) => recheck.faults.push(Fault::Extra { path: named }),
        }
    }
}

fn first_difference(a: &[u8], b: &[u8]) -> Option<usize> {
    let common = a.iter().zip(b).position(|(a, b)| a != b);
    common.or_else(|| (a.len() != b.len()).then(|| a.len().min(b.len())))
}

/// The line of a byte in a text; none in a file that is no text.
fn line_of(bytes: &[u8], offset: usize) -> Option<usize> {
    std::str::from_utf8(bytes).ok()?;
    let before = bytes.get(..offset)?;
    Some(1 + before.iter().filter(|byte| **byte == b'\n').count())
}
