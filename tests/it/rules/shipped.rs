//! The shipped files load, and all that is promised is among them.

use twoline::rules::{Library, show};

#[test]
fn every_shipped_file_loads() {
    let faults = Library::shipped_faults();
    assert!(faults.0.is_empty(), "\n{faults}");
}

#[test]
fn what_is_promised_is_there() {
    let library = Library::shipped();
    for id in [
        "expert-panel-2015",
        "joint-policy-2016",
        "joint-policy-2003",
        "arizona-school",
        "missouri-school",
        "washington-school",
        "texas-school",
        "england-school-entry",
        "ireland-school-entry",
        "iapb-school-6-9",
        "iapb-school-6-12",
        "nsw-preschool",
        "new-zealand-4y",
        "instrument-2003",
        "instrument-2013",
        "instrument-2021",
        "direct-referral",
        "urgent-signs",
        "plus-lens-2.50",
        "plus-lens-2.00",
        "color-plates",
        "stereo-random-dot-e",
        "cover-test",
        "red-reflex",
    ] {
        let set = library
            .rule_set(id)
            .unwrap_or_else(|| panic!("{id} is missing"));
        assert_eq!(set.content_hash.len(), 64);
        assert!(set.local.is_none());
        assert!(!show::sheet(set).rows.is_empty(), "{id}");
        assert!(show::list_line(set).contains(id));
    }
    for id in [
        "preschool-groups",
        "south-australia-acuity",
        "nsw-strabismus",
        "queensland-strabismus",
    ] {
        let grading = library
            .grading(id)
            .unwrap_or_else(|| panic!("{id} is missing"));
        assert_eq!(grading.content_hash.len(), 64);
        assert!(!show::grading_sheet(grading).rows.is_empty(), "{id}");
        assert!(show::grading_line(grading).contains(id));
    }
    for id in [
        "us-school",
        "us-preschool",
        "uk-school-entry",
        "international-school",
    ] {
        let protocol = library
            .protocol(id)
            .unwrap_or_else(|| panic!("{id} is missing"));
        assert_eq!(protocol.content_hash.len(), 64);
        assert!(show::protocol_lines(protocol).len() > 4);
    }
}

#[test]
fn the_hash_is_that_of_the_text() {
    use sha2::{Digest, Sha256};
    let set = Library::shipped().rule_set("joint-policy-2016").unwrap();
    let hex: String = Sha256::digest(set.text.as_bytes())
        .iter()
        .map(|b| format!("{b:02x}"))
        .collect();
    assert_eq!(&*set.content_hash, hex);
}
