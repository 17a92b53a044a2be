//! Projections: the state that screens and reports read.
//!
//! Each is one SELECT over the entries. A transaction runs it for the keys it touched, `verify`
//! runs it for all of them and compares.

use std::collections::BTreeSet;

use rusqlite::functions::FunctionFlags;
use rusqlite::{Connection, ErrorCode, params};
use uuid::Uuid;

use super::cell::Value;
use super::error::Result;
use super::ledger::Hash;

/// Registers the functions the projections use.
pub(super) fn functions(conn: &Connection) -> rusqlite::Result<()> {
    conn.create_scalar_function(
        "folded",
        1,
        FunctionFlags::SQLITE_UTF8
            | FunctionFlags::SQLITE_DETERMINISTIC
            | FunctionFlags::SQLITE_INNOCUOUS,
        |context| {
            let text = context.get_raw(0);
            Ok(crate::domain::text::folded(text.as_str().unwrap_or("")))
        },
    )
}

/// The id of the latest present entry of a child in one of its tables.
macro_rules! latest {
    ($table:literal, $more:literal, $first:literal) => {
        concat!(
            "(SELECT x.id FROM ",
            $table,
            " x JOIN tx t ON t.tx = x.tx ",
            "WHERE x.child_id = c.child_id ",
            $more,
            " AND NOT EXISTS (SELECT 1 FROM superseded s WHERE s.id = x.id) ",
            "ORDER BY ",
            $first,
            "t.lamport DESC, t.chain DESC, t.seq DESC, t.tx_hash DESC, x.ord DESC LIMIT 1)"
        )
    };
}

/// The columns of `child_current`, from a child `c`, its enrolment `e`, detail `d`, guardian `g` and
/// consent `k`; the second guardian's id follows.
macro_rules! child_columns {
    () => {
        concat!(
            "SELECT c.child_id, c.family_name, c.given_name, c.dob, c.provisional, ",
            "folded(c.family_name || ' ' || c.given_name), ",
            "e.site, e.term, e.grade, e.class, e.teacher, e.left_on, ",
            "d.sex, d.language, d.wears_glasses, d.under_care, d.last_exam_on, d.known_condition, ",
            "d.history, d.notes, g.name, g.phone, k.consent, d.id, g.id, ",
        )
    };
}

/// The state of children; ends in a WHERE clause to add to.
pub(super) const CHILDREN: &str = concat!(
    child_columns!(),
    latest!("guardian", "AND x.place = 2", ""),
    " FROM child c LEFT JOIN enrolment e ON e.id = ",
    latest!("enrolment", "", "x.from_on DESC, "),
    " LEFT JOIN child_detail d ON d.id = ",
    latest!("child_detail", "", ""),
    " LEFT JOIN guardian g ON g.id = ",
    latest!("guardian", "AND x.place = 1", ""),
    " LEFT JOIN consent k ON k.id = ",
    latest!("consent", "", ""),
    " WHERE c.id = ",
    latest!("child", "", ""),
);

/// The same for a child with one entry of each kind and no correction: a plain join, three times as
/// fast. It gives no row where a correction is in play, and breaks the key where there is a choice.
const PLAIN_CHILD: &str = concat!(
    child_columns!(),
    "h.id FROM child c LEFT JOIN enrolment e ON e.child_id = c.child_id ",
    "LEFT JOIN child_detail d ON d.child_id = c.child_id ",
    "LEFT JOIN guardian g ON g.child_id = c.child_id AND g.place = 1 ",
    "LEFT JOIN guardian h ON h.child_id = c.child_id AND h.place = 2 ",
    "LEFT JOIN consent k ON k.child_id = c.child_id ",
    "WHERE c.child_id = ?1 AND NOT EXISTS (SELECT 1 FROM superseded s ",
    "WHERE s.id IN (c.id, e.id, d.id, g.id, h.id, k.id))",
);

/// The state of visits; ends in a WHERE clause to add to.
pub(super) const VISITS: &str = concat!(
    "SELECT v.visit_id, v.child_id, v.site, v.screened_on, v.protocol, v.attempt, ",
    "(SELECT x.value FROM reading x JOIN tx t ON t.tx = x.tx WHERE x.visit_id = v.visit_id ",
    "AND x.field = 'status' AND NOT EXISTS (SELECT 1 FROM superseded s WHERE s.id = x.id) ",
    "ORDER BY x.try_no DESC, t.lamport DESC, t.chain DESC, t.seq DESC, t.tx_hash DESC, x.ord DESC LIMIT 1), ",
    "(SELECT count(*) FROM reading x WHERE x.visit_id = v.visit_id ",
    "AND NOT EXISTS (SELECT 1 FROM superseded s WHERE s.id = x.id)), ",
    "(SELECT coalesce(max(x.try_no), 0) FROM reading x WHERE x.visit_id = v.visit_id ",
    "AND NOT EXISTS (SELECT 1 FROM superseded s WHERE s.id = x.id)), ",
    "o.id, o.kind, o.decided_by, o.urgency, o.act_by, o.due_on, o.qualifiers, o.screener_id, o.station_id, ",
    "EXISTS (SELECT 1 FROM reading x JOIN superseded s ON s.id = x.id WHERE x.visit_id = v.visit_id) ",
    "OR EXISTS (SELECT 1 FROM outcome x JOIN superseded s ON s.id = x.id WHERE x.visit_id = v.visit_id) ",
    "OR EXISTS (SELECT 1 FROM visit x JOIN superseded s ON s.id = x.id WHERE x.visit_id = v.visit_id), ",
    "EXISTS (SELECT 1 FROM reading x WHERE x.visit_id = v.visit_id ",
    "AND NOT EXISTS (SELECT 1 FROM superseded s WHERE s.id = x.id) ",
    "GROUP BY x.try_no, x.field HAVING count(*) > 1) ",
    "OR EXISTS (SELECT 1 FROM visit x WHERE x.child_id = v.child_id AND x.site = v.site ",
    "AND x.screened_on = v.screened_on AND x.protocol = v.protocol AND x.attempt = v.attempt ",
    "AND NOT EXISTS (SELECT 1 FROM superseded s WHERE s.id = x.id) AND x.id <> v.id), ",
    "(SELECT max(t.recorded_at_ms) FROM tx t WHERE t.tx IN (",
    "SELECT x.tx FROM visit x WHERE x.visit_id = v.visit_id UNION ",
    "SELECT x.tx FROM reading x WHERE x.visit_id = v.visit_id UNION ",
    "SELECT x.tx FROM outcome x WHERE x.visit_id = v.visit_id)) ",
    "FROM visit v LEFT JOIN outcome o ON o.id = ",
    "(SELECT x.id FROM outcome x JOIN tx t ON t.tx = x.tx WHERE x.visit_id = v.visit_id ",
    "AND NOT EXISTS (SELECT 1 FROM superseded s WHERE s.id = x.id) ",
    "ORDER BY t.lamport DESC, t.chain DESC, t.seq DESC, t.tx_hash DESC, x.ord DESC LIMIT 1) ",
    "WHERE v.id = (SELECT x.id FROM visit x JOIN tx t ON t.tx = x.tx WHERE x.visit_id = v.visit_id ",
    "AND NOT EXISTS (SELECT 1 FROM superseded s WHERE s.id = x.id) ",
    "ORDER BY t.lamport DESC, t.chain DESC, t.seq DESC, t.tx_hash DESC, x.ord DESC LIMIT 1)",
);

/// Rebuilds every projection from the entries.
pub(super) fn rebuild(conn: &Connection) -> Result<()> {
    conn.execute_batch(&format!(
        "DELETE FROM child_current; INSERT INTO child_current {CHILDREN}; \
         DELETE FROM visit_current; INSERT INTO visit_current {VISITS};"
    ))?;
    Ok(())
}

/// Moves the projection of the children touched.
pub(super) fn children(conn: &Connection, touched: &BTreeSet<String>) -> Result<()> {
    if touched.is_empty() {
        return Ok(());
    }
    let mut gone = conn.prepare_cached("DELETE FROM child_current WHERE child_id = ?1")?;
    let mut come = conn.prepare_cached(&format!(
        "INSERT INTO child_current {CHILDREN} AND c.child_id = ?1"
    ))?;
    let mut plain = conn.prepare_cached(&format!("INSERT INTO child_current {PLAIN_CHILD}"))?;
    for child in touched {
        gone.execute([child])?;
        match plain.execute([child]) {
            Ok(1) => {}
            Ok(_) => {
                come.execute([child])?;
            }
            Err(e) if e.sqlite_error_code() == Some(ErrorCode::ConstraintViolation) => {
                come.execute([child])?;
            }
            Err(e) => return Err(e.into()),
        }
    }
    Ok(())
}

/// Moves the projection of the visits touched.
pub(super) fn visits(conn: &Connection, touched: &BTreeSet<Uuid>) -> Result<()> {
    if touched.is_empty() {
        return Ok(());
    }
    let mut gone = conn.prepare_cached("DELETE FROM visit_current WHERE visit_id = ?1")?;
    let mut come = conn.prepare_cached(&format!(
        "INSERT INTO visit_current {VISITS} AND v.visit_id = ?1"
    ))?;
    for visit in with_siblings(conn, touched)? {
        gone.execute([visit.cell()])?;
        come.execute([visit.cell()])?;
    }
    Ok(())
}

/// Adds the visits that share the key of a touched one: a conflict shows on each of them.
fn with_siblings(conn: &Connection, touched: &BTreeSet<Uuid>) -> Result<BTreeSet<Uuid>> {
    let mut all = touched.clone();
    let mut siblings = conn.prepare_cached(
        "SELECT y.visit_id FROM visit x JOIN visit y ON y.child_id = x.child_id AND y.site = x.site \
         AND y.screened_on = x.screened_on AND y.protocol = x.protocol AND y.attempt = x.attempt \
         WHERE x.visit_id = ?1 AND y.visit_id <> ?1",
    )?;
    for visit in touched {
        let mut rows = siblings.query([visit.cell()])?;
        while let Some(row) = rows.next()? {
            all.extend(Uuid::from_stored(row.get_ref(0)?));
        }
    }
    Ok(all)
}

/// Moves a chain to its new last transaction.
pub(super) fn chain(
    conn: &Connection,
    chain: Uuid,
    seq: i64,
    tx_hash: &Hash,
    entries: i64,
) -> Result<()> {
    conn.prepare_cached(
        "INSERT INTO chain_current (chain, seq, tx_hash, entries) VALUES (?1, ?2, ?3, ?4) \
         ON CONFLICT (chain) DO UPDATE SET seq = excluded.seq, tx_hash = excluded.tx_hash, \
         entries = entries + excluded.entries",
    )?
    .execute(params![chain.cell(), seq, &tx_hash[..], entries])?;
    Ok(())
}
