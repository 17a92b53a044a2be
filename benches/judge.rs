//! How fast `judge` is, with the csv crate merely copying the same file as baseline, in one run.
//!
//! The file is NHANES 2001–2004 (ages 12 to 19, see `tests/data`) repeated to a million rows.
//! Reading and writing are included; both write to a file that is not synced.
#![allow(
    missing_docs,
    clippy::unwrap_used,
    clippy::print_stdout,
    clippy::print_stderr
)]

use std::fs::File;
use std::io::Write;
use std::time::{Duration, Instant};

use twoline::actions::judge::{By, judge_bytes};
use twoline::intake::InputFile;
use twoline::rules::Library;

const SAMPLE: &str = include_str!("../tests/data/nhanes_2001_2004_ages_12_19.csv");
const ROWS: usize = 1_000_000;
const RUNS: usize = 3;

fn main() {
    let folder = tempfile::tempdir().unwrap();
    let source = folder.path().join("in.csv");
    let target = folder.path().join("out.csv");
    write_rows(&source);
    let size = std::fs::metadata(&source).unwrap().len();
    println!("{ROWS} rows, {:.0} MB, best of {RUNS}", size as f64 / 1e6);
    let copy = best(|| {
        let mut reader = csv::ReaderBuilder::new()
            .has_headers(false)
            .from_path(&source)
            .unwrap();
        let mut writer = csv::Writer::from_path(&target).unwrap();
        let mut record = csv::ByteRecord::new();
        while reader.read_byte_record(&mut record).unwrap() {
            writer.write_byte_record(&record).unwrap();
        }
        writer.flush().unwrap();
    });
    report("csv crate copies", copy, copy);
    let library = Library::shipped();
    let sets = ["joint-policy-2016", "expert-panel-2015", "instrument-2021"]
        .map(|id| (id, By::rule_set(library, id)));
    let protocol = [("us-school", By::protocol(library, "us-school"))];
    for (id, by) in sets.into_iter().chain(protocol) {
        let by = by.unwrap();
        let time = best(|| {
            let input = InputFile::read(&source).unwrap();
            let mut out = File::create(&target).unwrap();
            let tally = judge_bytes(by, &input, None, &mut out).unwrap();
            assert_eq!(tally.judged, ROWS as u64);
        });
        report(&format!("judge {id}"), time, copy);
    }
}

fn write_rows(path: &std::path::Path) {
    let (header, rows) = SAMPLE.split_once('\n').unwrap();
    let mut out = std::io::BufWriter::new(File::create(path).unwrap());
    writeln!(out, "{header}").unwrap();
    for row in rows.lines().cycle().take(ROWS) {
        writeln!(out, "{row}").unwrap();
    }
    out.flush().unwrap();
}

fn best(mut work: impl FnMut()) -> Duration {
    (0..RUNS)
        .map(|_| {
            let start = Instant::now();
            work();
            start.elapsed()
        })
        .min()
        .unwrap()
}

fn report(name: &str, time: Duration, copy: Duration) {
    println!(
        "{name:28} {:8.2} s {:>12.0} rows/s   {:5.2} times the copy",
        time.as_secs_f64(),
        ROWS as f64 / time.as_secs_f64(),
        time.as_secs_f64() / copy.as_secs_f64()
    );
}
