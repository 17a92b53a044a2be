//! Judges the rows of a results file without a store.

mod output;

use std::io::{self, Write};
use std::path::{Path, PathBuf};
use std::sync::atomic::{AtomicBool, Ordering};

use chrono::NaiveDate;

use crate::actions::rulebook::UnknownRule;
use crate::domain::acuity::Line;
use crate::domain::age::{AgeMonths, Grade};
use crate::domain::codes::Attempt;
use crate::domain::outcome::{Outcome, OutcomeKind};
use crate::domain::text::nearest;
use crate::intake::results::{self, Options, ResultRow, ResultsReader};
use crate::intake::{InputFile, Problem, Problems};
use crate::rules::{
    Case, Library, Protocol, RuleSet, judge_protocol, judge_rule_set, pass_line, pass_line_of_set,
};

use output::{Aside, OutcomeTable, RefusedTable};

/// What judges: a rule set on its own, or a protocol with everything it uses.
#[derive(Debug, Clone, Copy)]
pub enum By<'a> {
    /// A rule set alone.
    RuleSet(&'a RuleSet),
    /// A protocol and the library of its rule sets.
    Protocol(&'a Library, &'a Protocol),
}

impl<'a> By<'a> {
    /// Finds a rule set by its id.
    pub fn rule_set(library: &'a Library, id: &str) -> Result<By<'a>, UnknownRule> {
        library
            .rule_set(id)
            .map(By::RuleSet)
            .ok_or_else(|| UnknownRule::rule_set(library, id))
    }

    /// Finds a protocol by its id.
    pub fn protocol(library: &'a Library, id: &str) -> Result<By<'a>, UnknownRule> {
        library
            .protocol(id)
            .map(|protocol| By::Protocol(library, protocol))
            .ok_or_else(|| UnknownRule::protocol(library, id))
    }

    /// Judges one case.
    pub fn judge(self, case: &Case<'_>) -> Outcome {
        match self {
            By::RuleSet(set) => judge_rule_set(set, case),
            By::Protocol(library, protocol) => judge_protocol(library, protocol, case),
        }
    }

    fn pass_line(self, age: Option<AgeMonths>, grade: Option<Grade>) -> Option<Line> {
        match self {
            By::RuleSet(set) => pass_line_of_set(set, age, grade),
            By::Protocol(library, protocol) => pass_line(library, protocol, age, grade),
        }
        .map(|pass| pass.line)
    }
}

/// What to judge and where to write.
#[derive(Debug, Clone)]
pub struct JudgeRequest {
    /// The results file; `-` is standard input.
    pub file: PathBuf,
    /// The screening day of rows that do not say one.
    pub date: Option<NaiveDate>,
    /// The file to write; standard output when none.
    pub out: Option<PathBuf>,
    /// Whether unknown columns are handed through.
    pub pass_through: bool,
    /// Whether good rows are written although others are bad; needs `out`.
    pub keep_going: bool,
}

/// What came of it.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct Tally {
    /// Rows that were judged.
    pub judged: u64,
    /// Rows that were refused.
    pub refused: u64,
    /// Rows by outcome, in the order of [`OutcomeKind::ALL`].
    pub outcomes: [u64; 5],
    /// What is wrong with the refused rows.
    pub problems: Problems,
    /// Where refused rows were written.
    pub refused_file: Option<PathBuf>,
    /// What to say beside it.
    pub remarks: Vec<String>,
}

/// Why nothing was written.
#[derive(Debug, thiserror::Error)]
pub enum JudgeError {
    /// The file is bad.
    #[error("{0}")]
    Input(Problems),
    /// The output cannot be what was asked for.
    #[error("{0}")]
    Output(Problem),
    /// Reading or writing failed.
    #[error("cannot write {target}: {error}")]
    Write {
        /// What was written to.
        target: String,
        /// What the system said.
        error: io::Error,
    },
    /// Stopped by the user.
    #[error("stopped; nothing was written")]
    Interrupted,
}

impl From<Problem> for JudgeError {
    fn from(problem: Problem) -> Self {
        JudgeError::Input(problem.into())
    }
}

impl From<Problems> for JudgeError {
    fn from(problems: Problems) -> Self {
        JudgeError::Input(problems)
    }
}

/// How many rows pass between two looks at the stop flag.
const STEP: u64 = 8_192;

/// Reads the file that is to be judged.
pub fn read_input(path: &Path) -> Result<InputFile, JudgeError> {
    Ok(InputFile::read(path)?)
}

/// Judges a file that was read. Without `out`, rows go to `stdout`, and only once the whole file is known to be
/// good; with it, they go to a file aside that is renamed at the end.
pub fn judge_file(
    by: By<'_>,
    request: &JudgeRequest,
    input: &InputFile,
    stdout: &mut dyn Write,
    stop: &AtomicBool,
    progress: &mut dyn FnMut(u64),
) -> Result<Tally, JudgeError> {
    let Some(out) = &request.out else {
        let mut judging = Judging::new(by, request, input, stop, progress);
        judging.rows::<&mut dyn Write>(None, None)?;
        return judging.rows(Some(stdout), None);
    };
    let mut aside = Aside::create(out, &request.file)?;
    let mut judging = Judging::new(by, request, input, stop, progress);
    if !request.keep_going {
        let tally = judging.rows(Some(aside.file()), None)?;
        aside.rename()?;
        return Ok(tally);
    }
    let refused_path = output::refused_path(out);
    let mut refused = Aside::create(&refused_path, &request.file)?;
    let mut tally = judging.rows(Some(aside.file()), Some(refused.file()))?;
    if tally.refused > 0 {
        refused.rename()?;
        tally.refused_file = Some(refused_path);
    } else {
        // One left over from an earlier run would be taken for this one's.
        output::remove_if_there(&refused_path)?;
    }
    aside.rename()?;
    Ok(tally)
}

/// Judges bytes into a writer: what [`judge_file`] does once files are open.
pub fn judge_bytes(
    by: By<'_>,
    input: &InputFile,
    date: Option<NaiveDate>,
    out: &mut dyn Write,
) -> Result<Tally, JudgeError> {
    let request = JudgeRequest {
        file: PathBuf::from(&input.name),
        date,
        out: None,
        pass_through: false,
        keep_going: false,
    };
    let stop = AtomicBool::new(false);
    let mut progress = |_| {};
    Judging::new(by, &request, input, &stop, &mut progress).rows(Some(out), None)
}

struct Judging<'a> {
    by: By<'a>,
    request: &'a JudgeRequest,
    input: &'a InputFile,
    stop: &'a AtomicBool,
    progress: &'a mut dyn FnMut(u64),
}

impl<'a> Judging<'a> {
    fn new(
        by: By<'a>,
        request: &'a JudgeRequest,
        input: &'a InputFile,
        stop: &'a AtomicBool,
        progress: &'a mut dyn FnMut(u64),
    ) -> Judging<'a> {
        Judging {
            by,
            request,
            input,
            stop,
            progress,
        }
    }

    /// Reads every row; judges and writes those that are good. Without `out` rows are only read.
    ///
    /// A bad row without `refused` is an error once all rows were read.
    fn rows<W: Write>(&mut self, out: Option<W>, refused: Option<W>) -> Result<Tally, JudgeError> {
        let options = Options {
            takes_age: true,
            takes_repeats: true,
            pass_through: self.request.pass_through,
            day: self.request.date,
            ..Options::default()
        };
        let by = self.by;
        let pass_line = move |age, grade| by.pass_line(age, grade);
        let input = self.input;
        let mut reader = ResultsReader::open(&input.name, &input.bytes, options, Some(&pass_line))?;
        let mut tally = Tally {
            remarks: remarks(&reader)?,
            ..Tally::default()
        };
        let keeps_going = refused.is_some();
        let mut table = out.map(|w| OutcomeTable::new(w, &reader)).transpose()?;
        let mut refusals = refused.map(|w| RefusedTable::new(w, &reader)).transpose()?;
        let mut row = ResultRow::default();
        while let Some(problems) = reader.next(&mut row)? {
            let read = tally.judged + tally.refused;
            if read % STEP == STEP - 1 {
                if self.stop.load(Ordering::Relaxed) {
                    return Err(JudgeError::Interrupted);
                }
                (self.progress)(read + 1);
            }
            if problems.is_empty() {
                tally.judged += 1;
                if let Some(table) = &mut table
                    && (keeps_going || tally.refused == 0)
                {
                    let outcome = by.judge(&case_of(&row));
                    tally.outcomes[index_of(outcome.kind)] += 1;
                    table.write(reader.record(), &outcome)?;
                }
                continue;
            }
            tally.refused += 1;
            for problem in problems {
                if let Some(refusals) = &mut refusals {
                    refusals.write(&problem, reader.record())?;
                }
                tally.problems.push(problem);
            }
        }
        if !keeps_going && tally.refused > 0 {
            return Err(JudgeError::Input(tally.problems));
        }
        table.map(OutcomeTable::finish).transpose()?;
        refusals.map(RefusedTable::finish).transpose()?;
        Ok(tally)
    }
}

fn case_of(row: &ResultRow) -> Case<'_> {
    Case {
        age: row.age,
        grade: row.grade,
        on: row.screened_on,
        attempt: row.attempt.unwrap_or(Attempt::First),
        ..Case::new(&row.readings)
    }
}

fn index_of(kind: OutcomeKind) -> usize {
    OutcomeKind::ALL
        .iter()
        .position(|k| *k == kind)
        .unwrap_or(0)
}

/// Refuses columns that would stand twice in the output, and points out handed-through columns
/// that look like a misspelt reading.
fn remarks(reader: &ResultsReader<'_>) -> Result<Vec<String>, Problems> {
    let known = results::known();
    let sheet = reader.sheet();
    let mut problems = Problems::default();
    let mut remarks = Vec::new();
    for (header, column) in sheet.headers().iter().zip(reader.columns()) {
        if column.is_some() {
            continue;
        }
        if output::ADDED.iter().any(|(name, _)| name == header) {
            problems.push(
                Problem::of_file(sheet.file(), "a column that judge writes", "another name")
                    .at(crate::intake::Place { row: 1, line: 1 })
                    .in_column(header)
                    .cure("take the column out, or judge the file it was made from"),
            );
        }
        if let Some(word) = nearest(header, known.iter().map(|k| k.0)) {
            remarks.push(format!(
                "column {} is handed through unread; is {word} meant?",
                crate::domain::text::shown(header, 60)
            ));
        }
    }
    problems.or(remarks)
}
