//! Projections: the state that screens and reports read.
//!
//! Each is one SELECT over the entries. A transaction runs it for the keys it touched, `verify`
//! runs it for all of them and compares.

use std::collections::BTreeSet;

use rusqlite::functions::FunctionFlags;
use rusqlite::{Connection, ErrorCode, params, params_from_iter};
use uuid::Uuid;

use super::cell::Value;
use super::error::Result;

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

/// The latest present row of the visit id in a table `x`.
macro_rules! standing {
    ($of:literal) => {
        concat!(
            "(SELECT x.id FROM visit x JOIN tx t ON t.tx = x.tx WHERE x.visit_id = ",
            $of,
            " AND NOT EXISTS (SELECT 1 FROM superseded s WHERE s.id = x.id) ",
            "ORDER BY t.lamport DESC, t.chain DESC, t.seq DESC, t.tx_hash DESC, x.ord DESC LIMIT 1)"
        )
    };
}

/// The ids under which a visit was recorded, each with the first of its key; ends in a WHERE clause
/// to add to, by whole keys.
pub(super) const PARTS: &str = concat!(
    "SELECT v.visit_id, first_value(v.visit_id) OVER (",
    "PARTITION BY v.child_id, v.site, v.screened_on, v.protocol, v.attempt ",
    "ORDER BY u.lamport, u.chain, u.seq, u.tx_hash, v.ord) ",
    "FROM visit v JOIN tx u ON u.tx = v.tx WHERE v.id = ",
    standing!("v.visit_id"),
);

/// Holds for a row `x` of any part of the visit `v`.
macro_rules! of_parts {
    () => {
        "x.visit_id IN (SELECT q.visit_id FROM visit_part q WHERE q.lead = v.visit_id) "
    };
}

/// The same for a row that no correction superseded.
macro_rules! live_of_parts {
    () => {
        concat!(
            of_parts!(),
            "AND NOT EXISTS (SELECT 1 FROM superseded s WHERE s.id = x.id) "
        )
    };
}

/// The state of visits, from the present `visit_part`; ends in a WHERE clause to add to.
pub(super) const VISITS: &str = concat!(
    "SELECT v.visit_id, v.child_id, v.site, v.screened_on, v.protocol, v.attempt, ",
    "(SELECT x.value FROM reading x JOIN tx t ON t.tx = x.tx WHERE x.field = 'status' AND ",
    live_of_parts!(),
    "ORDER BY x.try_no DESC, t.lamport DESC, t.chain DESC, t.seq DESC, t.tx_hash DESC, x.ord DESC LIMIT 1), ",
    "(SELECT count(DISTINCT x.try_no || x.field) FROM reading x WHERE ",
    live_of_parts!(),
    "), (SELECT coalesce(max(x.try_no), 0) FROM reading x WHERE ",
    live_of_parts!(),
    "), o.id, o.kind, o.decided_by, o.urgency, o.act_by, o.due_on, o.qualifiers, o.screener_id, o.station_id, ",
    "EXISTS (SELECT 1 FROM reading x JOIN superseded s ON s.id = x.id WHERE ",
    of_parts!(),
    ") OR EXISTS (SELECT 1 FROM outcome x JOIN superseded s ON s.id = x.id WHERE ",
    of_parts!(),
    ") OR EXISTS (SELECT 1 FROM visit x JOIN superseded s ON s.id = x.id WHERE ",
    of_parts!(),
    "), EXISTS (SELECT 1 FROM reading x WHERE ",
    live_of_parts!(),
    "GROUP BY x.try_no, x.field HAVING count(DISTINCT x.value) > 1), ",
    "(SELECT count(*) FROM visit_part q WHERE q.lead = v.visit_id), ",
    "(SELECT count(*) FROM outcome x WHERE ",
    live_of_parts!(),
    "), (SELECT max(t.recorded_at_ms) FROM tx t WHERE t.tx IN (",
    "SELECT x.tx FROM visit x WHERE ",
    of_parts!(),
    "UNION SELECT x.tx FROM reading x WHERE ",
    of_parts!(),
    "UNION SELECT x.tx FROM outcome x WHERE ",
    of_parts!(),
    ")) FROM visit_part p JOIN visit v ON v.id = ",
    standing!("p.visit_id"),
    " LEFT JOIN outcome o ON o.id = ",
    "(SELECT x.id FROM outcome x JOIN tx t ON t.tx = x.tx WHERE ",
    live_of_parts!(),
    "ORDER BY t.lamport DESC, t.chain DESC, t.seq DESC, t.tx_hash DESC, x.ord DESC LIMIT 1) ",
    "WHERE p.visit_id = p.lead",
);

/// Rebuilds every projection from the entries.
pub(super) fn rebuild(conn: &Connection) -> Result<()> {
    conn.execute_batch(&format!(
        "DELETE FROM child_current; INSERT INTO child_current {CHILDREN}; \
         DELETE FROM visit_part; INSERT INTO visit_part {PARTS}; \
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

/// Moves the projection of the visits touched, and of all that share a key with one of them.
pub(super) fn visits(conn: &Connection, touched: &BTreeSet<Uuid>) -> Result<()> {
    const KEY: &str = "x.child_id, x.site, x.screened_on, x.protocol, x.attempt";
    let mut keys: BTreeSet<[String; 5]> = BTreeSet::new();
    let mut ids = touched.clone();
    let mut of_id =
        conn.prepare_cached(&format!("SELECT {KEY} FROM visit x WHERE x.visit_id = ?1"))?;
    let mut of_key = conn.prepare_cached(&format!(
        "SELECT x.visit_id FROM visit x WHERE ({KEY}) = (?1, ?2, ?3, ?4, ?5)"
    ))?;
    let mut to_see: Vec<Uuid> = touched.iter().copied().collect();
    while let Some(id) = to_see.pop() {
        let mut rows = of_id.query([id.cell()])?;
        while let Some(row) = rows.next()? {
            let key = [
                row.get(0)?,
                row.get(1)?,
                row.get(2)?,
                row.get(3)?,
                row.get(4)?,
            ];
            if !keys.contains(&key) {
                let mut rows = of_key.query(params_from_iter(&key))?;
                while let Some(row) = rows.next()? {
                    let other = Uuid::from_stored(row.get_ref(0)?);
                    to_see.extend(other.filter(|other| ids.insert(*other)));
                }
                keys.insert(key);
            }
        }
    }
    for id in &ids {
        for table in ["visit_part", "visit_current"] {
            conn.prepare_cached(&format!("DELETE FROM {table} WHERE visit_id = ?1"))?
                .execute([id.cell()])?;
        }
    }
    for key in &keys {
        conn.prepare_cached(&format!(
            "INSERT INTO visit_part {PARTS} \
             AND (v.child_id, v.site, v.screened_on, v.protocol, v.attempt) = (?1, ?2, ?3, ?4, ?5)"
        ))?
        .execute(params_from_iter(key))?;
    }
    for id in &ids {
        conn.prepare_cached(&format!(
            "INSERT INTO visit_current {VISITS} AND p.visit_id = ?1"
        ))?
        .execute([id.cell()])?;
    }
    Ok(())
}

/// Moves a chain from one transaction (none at its start) to the next; where another followed it
/// already this is a second end. Returns whether it is.
pub(super) fn chain(
    conn: &Connection,
    chain: Uuid,
    prev: Option<&[u8]>,
    next: (i64, &[u8]),
    entries: i64,
) -> Result<bool> {
    let (seq, hash) = next;
    let moved = conn
        .prepare_cached(
            "UPDATE chain_current SET seq = ?3, tx_hash = ?4, entries = entries + ?5 \
             WHERE chain = ?1 AND tx_hash = ?2",
        )?
        .execute(params![chain.cell(), prev, seq, hash, entries])?;
    let mut forked = false;
    if moved == 0 {
        forked = conn
            .prepare_cached("SELECT EXISTS (SELECT 1 FROM chain_current WHERE chain = ?1)")?
            .query_row([chain.cell()], |r| r.get(0))?;
        conn.prepare_cached(
            "INSERT INTO chain_current (chain, seq, tx_hash, entries) VALUES (?1, ?2, ?3, ?4)",
        )?
        .execute(params![chain.cell(), seq, hash, entries])?;
    }
    Ok(forked)
}
