//! `twoline refer`: referrals and how they stand.

use clap::{Args, Subcommand};

use super::output::{aligned, clean, print_clean, wrapped};
use super::values::code;
use super::{Failure, Global, open};
use crate::actions::{Desk, Lost, ReferralDetails, ReferralView};
use crate::domain::age::spoken;
use crate::domain::codes::YesNo;
use crate::domain::exam::{CONFIRMED, Confirmed};
use crate::domain::outcome::Urgency;

/// Show referrals, open one by hand, say more of one
///
/// A referral is opened by the outcome that refers. CODE is the code on its letter and form; the
/// child's id does where the child has one referral.
#[derive(Debug, Args)]
pub(super) struct Refer {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// List referrals with what is next, the first to see to first
    List {
        /// The closed ones as well
        #[arg(long)]
        all: bool,
        /// Only lost children, with why: referred in an earlier term or at another site than theirs now,
        /// open, and no examination known
        #[arg(long, conflicts_with = "all")]
        lost: bool,
        /// Site code
        #[arg(long, value_name = "CODE")]
        site: Option<String>,
    },
    /// Everything about one referral
    Show {
        /// Its code, or the child's id
        code: String,
    },
    /// Open a referral by hand
    Open {
        /// The child's id
        child: String,
        /// Why
        #[arg(long, value_name = "TEXT")]
        reason: String,
        /// How soon: emergency, prompt, routine
        #[arg(long, default_value = "routine", value_parser = |s: &str| code(s, Urgency::from_word, Urgency::words))]
        urgency: Urgency,
    },
    /// Say more of a referral; what is not given stays as it was
    Set {
        /// Its code, or the child's id
        code: String,
        /// Who is responsible
        #[arg(long, value_name = "NAME")]
        responsible: Option<String>,
        /// Whether the family agrees to sharing it: yes, no
        #[arg(long, value_parser = |s: &str| code(s, YesNo::from_word, YesNo::words))]
        consent: Option<YesNo>,
        /// Whether an interpreter is needed: yes, no
        #[arg(long, value_parser = |s: &str| code(s, YesNo::from_word, YesNo::words))]
        interpreter: Option<YesNo>,
        /// Language of the family
        #[arg(long, value_name = "LANGUAGE")]
        language: Option<String>,
        /// What is known of an earlier examination
        #[arg(long, value_name = "TEXT")]
        prior_exam: Option<String>,
    },
}

impl Refer {
    pub(super) fn run(&self, global: &Global) -> Result<(), Failure> {
        match &self.command {
            Command::List {
                lost: true, site, ..
            } => {
                let desk = open::to_read(global)?;
                let mut lost = desk.lost_children()?;
                lost.retain(|l| {
                    let referral = &l.referral;
                    site.as_ref()
                        .is_none_or(|s| *s == referral.site || *s == referral.referred_at)
                });
                print_clean(&lost_lines(&lost))
            }
            Command::List { all, site, .. } => {
                let desk = open::to_read(global)?;
                let list: Vec<ReferralView> = desk
                    .referral_list()?
                    .into_iter()
                    .filter(|r| *all || r.standing.next.is_some())
                    .filter(|r| site.as_ref().is_none_or(|s| *s == r.site))
                    .collect();
                print_clean(&list_lines(&desk, &list)?)
            }
            Command::Show { code } => {
                let desk = open::to_read(global)?;
                let referral = desk.find_referral(code)?;
                print_clean(&whole(&desk, &referral)?)
            }
            Command::Open {
                child,
                reason,
                urgency,
            } => {
                let mut desk = open::to_sign(global)?;
                let referral = desk.refer(child, reason, *urgency)?;
                print_clean(&whole(&desk, &referral)?)
            }
            Command::Set {
                code,
                responsible,
                consent,
                interpreter,
                language,
                prior_exam,
            } => {
                let mut desk = open::to_sign(global)?;
                let id = desk.find_referral(code)?.id;
                let referral = desk.describe_referral(
                    id,
                    ReferralDetails {
                        responsible: responsible.clone(),
                        consent_to_share: *consent,
                        interpreter: *interpreter,
                        language: language.clone(),
                        prior_exam: prior_exam.clone(),
                    },
                )?;
                print_clean(&whole(&desk, &referral)?)
            }
        }
    }
}

/// Returns the lost children, each with why it is on the list.
fn lost_lines(lost: &[Lost]) -> Vec<String> {
    let mut lines = vec![match lost.len() {
        0 => "no lost child".to_owned(),
        1 => "1 lost child".to_owned(),
        many => format!("{many} lost children"),
    }];
    let mut rows = Vec::new();
    for Lost { referral, why } in lost {
        rows.push(vec![
            format!("{}, {}", referral.family_name, referral.given_name),
            referral.child_id.clone(),
            referral.code.to_string(),
            referral.opened.urgency.title().to_owned(),
            why.clone(),
        ]);
    }
    lines.extend(aligned(&rows));
    lines
}

fn list_lines(desk: &Desk, list: &[ReferralView]) -> Result<Vec<String>, Failure> {
    let settings = desk.follow_up()?;
    let overdue = list
        .iter()
        .filter(|r| r.standing.overdue(desk.today()).is_some())
        .count();
    let mut rows = vec![
        ["due", "child", "id", "code", "next"]
            .map(str::to_owned)
            .to_vec(),
    ];
    for referral in list {
        rows.push(vec![
            due_words(desk, referral),
            format!("{}, {}", referral.family_name, referral.given_name),
            referral.child_id.clone(),
            referral.code.to_string(),
            referral.standing.next.as_ref().map_or_else(
                || referral.standing.state.title().to_owned(),
                |next| next.kind.in_words(&settings),
            ),
        ]);
    }
    let mut lines = vec![format!("{} referrals, {overdue} overdue", list.len())];
    lines.extend(aligned(&rows));
    Ok(lines)
}

/// Returns when the next thing is due, in words.
fn due_words(desk: &Desk, referral: &ReferralView) -> String {
    let Some(next) = &referral.standing.next else {
        return String::new();
    };
    match (next.due - desk.today()).num_days() {
        0 => "today".to_owned(),
        1 => "tomorrow".to_owned(),
        -1 => "1 day late".to_owned(),
        days if days < 0 => format!("{} days late", -days),
        _ => next.due.to_string(),
    }
}

/// Returns one referral as a timeline.
pub(super) fn whole(desk: &Desk, referral: &ReferralView) -> Result<Vec<String>, Failure> {
    let settings = desk.follow_up()?;
    let mut lines = vec![
        format!(
            "{}, {}   {}   code {}",
            referral.family_name, referral.given_name, referral.child_id, referral.code
        ),
        format!(
            "{} referral of {}{}; {}",
            referral.opened.urgency.title(),
            spoken(referral.opened.on),
            referral
                .opened
                .act_by
                .map(|d| format!(", act by {}", spoken(d)))
                .unwrap_or_default(),
            referral.standing.state.title()
        ),
    ];
    lines.extend(wrapped(&clean(&referral.why), ""));
    if let Some(kind) = referral.outcome_now {
        lines.push(format!(
            "the outcome has been corrected since: now {}",
            kind.title()
        ));
    }
    for (what, text) in [
        ("responsible", &referral.responsible),
        ("language", &referral.language),
        ("earlier examination", &referral.prior_exam),
    ] {
        if !text.is_empty() {
            lines.push(format!("{what}: {text}"));
        }
    }
    let missing = referral.missing();
    if !missing.is_empty() && referral.standing.state.is_open() {
        lines.extend(wrapped(
            &format!("missing before it leaves: {}", missing.join(", ")),
            "  ",
        ));
    }
    lines.push(String::new());
    for view in &referral.steps {
        let by = if view.screener.is_empty() {
            String::new()
        } else {
            format!("   {}", view.screener)
        };
        lines.push(format!(
            "{}  {}{by}",
            spoken(view.step.on),
            view.step.in_words()
        ));
    }
    if let Some(report) = referral.report() {
        lines.push(String::new());
        for (field, text) in report.recorded() {
            lines.push(format!("  {}: {text}", field.title()));
        }
        match referral.confirmed(desk.group_of(referral)) {
            Confirmed::Yes(why) => {
                lines.extend(wrapped(&format!("confirmed: {}", why.join("; ")), "  "));
            }
            Confirmed::No => lines.push("nothing was confirmed".to_owned()),
            Confirmed::NotKnown => {
                lines.push("the report does not say whether anything was confirmed".to_owned());
            }
        }
        lines.extend(wrapped(CONFIRMED, "  "));
    }
    if let Some(next) = &referral.standing.next {
        lines.push(String::new());
        lines.push(format!(
            "next: {} ({}; {})",
            next.kind.in_words(&settings),
            due_words(desk, referral),
            next.why
        ));
    }
    Ok(lines)
}
