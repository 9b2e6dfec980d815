//! From table texts to checked tables.

use std::collections::BTreeMap;
use std::hash::Hash;
use std::sync::Arc;

use rustc_hash::FxHashSet;

use crate::mixture::uncertainty::ClassMasks;
use crate::table::{Column, Row, Table, TableError};

use super::tables::{
    Interaction, MainGroup, MainIndex, Override, Slip, Slips, Subgroup, TableFile, UnifacOverlay,
    UnifacTables,
};

/// Main groups are kept as bits of a `u128`.
const MOST_MAIN_GROUPS: usize = 128;

/// The position of a main group in a list that ascends by number.
pub(super) fn main_index(groups: &[MainGroup], number: u16) -> Option<MainIndex> {
    let at = groups
        .binary_search_by_key(&number, |group| group.number)
        .ok()?;
    u8::try_from(at).ok().map(MainIndex)
}

/// The tables while their files are read, layer upon layer.
#[derive(Default)]
pub(super) struct Reading {
    main_groups: BTreeMap<u16, Arc<str>>,
    subgroups: BTreeMap<u16, Subgroup>,
    interactions: BTreeMap<(u16, u16), Interaction>,
    /// Pairs given by an overlay.
    overlaid: Vec<(u16, u16)>,
    slips: Vec<Slip>,
    sources: Vec<Arc<str>>,
    notes: Vec<Arc<str>>,
    overrides: Vec<Override>,
}

impl Reading {
    /// Reads the files of one layer; main groups come first because the others refer to them.
    pub(super) fn layer(
        &mut self,
        files: &UnifacOverlay<'_>,
        is_overlay: bool,
    ) -> Result<(), TableError> {
        if let Some(file) = files.main_groups {
            self.main_groups(file, is_overlay)?;
        }
        if let Some(file) = files.subgroups {
            self.subgroups(file, is_overlay)?;
        }
        if let Some(file) = files.interactions {
            self.interactions(file, is_overlay)?;
        }
        Ok(())
    }

    fn main_groups(&mut self, file: TableFile<'_>, is_overlay: bool) -> Result<(), TableError> {
        let table = self.open(file)?;
        let number = table.column("number")?;
        let name = table.column("name")?;
        let mut seen = FxHashSet::default();
        for row in table.rows() {
            let key = row.required_integer(number)?;
            refuse_twice(&mut seen, key, row, number)?;
            if !self.main_groups.contains_key(&key) && self.main_groups.len() == MOST_MAIN_GROUPS {
                return Err(row.fault(number, "is one main group too many (128 at most)"));
            }
            let old = self
                .main_groups
                .insert(key, row.required_text(name)?.into());
            if is_overlay {
                self.note_override(file, row, format!("main group {key}"), old.is_some());
            }
        }
        Ok(())
    }

    fn subgroups(&mut self, file: TableFile<'_>, is_overlay: bool) -> Result<(), TableError> {
        let table = self.open(file)?;
        let number = table.column("number")?;
        let main_group = table.column("main_group")?;
        let formula = table.column("formula")?;
        let composition = table.column("composition")?;
        let r = table.column_in("r", "-")?;
        let q = table.column_in("q", "-")?;
        let example = table.optional_column("example");
        let mut seen = FxHashSet::default();
        for row in table.rows() {
            let key = row.required_integer(number)?;
            refuse_twice(&mut seen, key, row, number)?;
            let main = row.required_integer(main_group)?;
            if !self.main_groups.contains_key(&main) {
                return Err(row.fault(main_group, "is no main group of this set"));
            }
            let atoms = row.text(composition);
            if !atoms.is_empty() && !is_formula(atoms) {
                return Err(row.fault(composition, "is no formula such as C1.5H3O1"));
            }
            let (r_value, q_value) = (row.required_number(r)?, row.required_number(q)?);
            if r_value <= 0.0 {
                return Err(row.fault(r, "is not positive"));
            }
            if q_value < 0.0 {
                return Err(row.fault(q, "is negative"));
            }
            let subgroup = Subgroup {
                number: key,
                main_group: main,
                formula: row.required_text(formula)?.into(),
                composition: (!atoms.is_empty()).then(|| atoms.into()),
                r: r_value,
                q: q_value,
                example: example
                    .map(|column| row.text(column))
                    .filter(|text| !text.is_empty())
                    .map(Into::into),
                main_index: MainIndex(0),
            };
            let old = self.subgroups.insert(key, subgroup);
            if is_overlay {
                self.note_override(file, row, format!("subgroup {key}"), old.is_some());
            }
        }
        Ok(())
    }

    fn interactions(&mut self, file: TableFile<'_>, is_overlay: bool) -> Result<(), TableError> {
        let table = self.open(file)?;
        let i = table.column("i")?;
        let j = table.column("j")?;
        let columns = InteractionColumns::find(&table, "")?;
        let mut seen = FxHashSet::default();
        for row in table.rows() {
            let key = (row.required_integer(i)?, row.required_integer(j)?);
            refuse_twice(&mut seen, key, row, i)?;
            for (column, number) in [(i, key.0), (j, key.1)] {
                if !self.main_groups.contains_key(&number) {
                    return Err(row.fault(column, "is no main group of this set"));
                }
            }
            let value = columns.required(row)?;
            if key.0 == key.1 && value != Interaction::default() {
                return Err(row.fault(
                    columns.a,
                    "is not zero, though a main group does not interact with itself",
                ));
            }
            let old = self.interactions.insert(key, value);
            if is_overlay {
                self.overlaid.push(key);
                self.note_override(
                    file,
                    row,
                    format!("interaction {}-{}", key.0, key.1),
                    old.is_some(),
                );
            }
        }
        Ok(())
    }

    /// Reads the slips of one interaction file; `interactions` is its name.
    pub(super) fn slips(
        &mut self,
        file: TableFile<'_>,
        interactions: &str,
    ) -> Result<(), TableError> {
        let stem = interactions
            .rsplit('/')
            .next()
            .unwrap_or(interactions)
            .trim_end_matches(".csv");
        let table = self.open(file)?;
        let of = table.column("interactions")?;
        let i = table.column("i")?;
        let j = table.column("j")?;
        let circulated = InteractionColumns::find(&table, "")?;
        let used = InteractionColumns::find(&table, "_used")?;
        let reason = table.column("reason")?;
        let evidence = table.column("evidence")?;
        let mut seen = FxHashSet::default();
        for row in table.rows().filter(|row| row.text(of) == stem) {
            let key = (row.required_integer(i)?, row.required_integer(j)?);
            refuse_twice(&mut seen, key, row, i)?;
            let value = circulated.required(row)?;
            if self.overlaid.contains(&key) {
                continue;
            }
            if self.interactions.get(&key) != Some(&value) {
                return Err(row.fault(
                    circulated.a,
                    "does not repeat the value of the interaction file",
                ));
            }
            self.slips.push(Slip {
                i: key.0,
                j: key.1,
                circulated: value,
                replacement: used.optional(row)?,
                reason: row.required_text(reason)?.into(),
                evidence: row.required_text(evidence)?.into(),
            });
        }
        Ok(())
    }

    /// Puts everything into index form.
    pub(super) fn finish(self, model: &'static str, treatment: Slips) -> UnifacTables {
        let main_groups: Vec<_> = self
            .main_groups
            .into_iter()
            .map(|(number, name)| MainGroup { number, name })
            .collect();
        let index = |number: u16| {
            main_index(&main_groups, number).expect("main groups were checked row by row")
        };
        let mut subgroups: Vec<_> = self.subgroups.into_values().collect();
        let largest = subgroups
            .last()
            .map_or(0, |group| usize::from(group.number));
        let mut by_number = vec![None; largest + 1];
        for (at, subgroup) in (0_u16..).zip(&mut subgroups) {
            subgroup.main_index = index(subgroup.main_group);
            by_number[usize::from(subgroup.number)] = Some(at);
        }

        let n = main_groups.len();
        let mut circulated = vec![None; n * n];
        let mut used = vec![Interaction::default(); n * n];
        for (&(i, j), &value) in &self.interactions {
            let cell = index(i).get() * n + index(j).get();
            circulated[cell] = Some(value);
            used[cell] = value;
        }
        if treatment == Slips::Corrected {
            for slip in &self.slips {
                if let Some(value) = slip.replacement {
                    used[index(slip.i).get() * n + index(slip.j).get()] = value;
                }
            }
        }
        let known = (0..n)
            .map(|i| {
                (0..n)
                    .filter(|&j| {
                        i == j || circulated[i * n + j].is_some() && circulated[j * n + i].is_some()
                    })
                    .fold(0_u128, |bits, j| bits | 1 << j)
            })
            .collect();
        UnifacTables {
            class_masks: ClassMasks::new(&main_groups),
            model,
            main_groups,
            subgroups,
            by_number,
            used,
            circulated,
            known,
            slips: self.slips,
            treatment,
            sources: self.sources,
            notes: self.notes,
            overrides: self.overrides,
        }
    }

    fn open(&mut self, file: TableFile<'_>) -> Result<Table, TableError> {
        let table = Table::read(file.name, file.text)?;
        for (fact, list) in [("source", &mut self.sources), ("note", &mut self.notes)] {
            for text in table.facts(fact) {
                if !list.iter().any(|known| **known == *text) {
                    list.push(text.into());
                }
            }
        }
        Ok(table)
    }

    fn note_override(&mut self, file: TableFile<'_>, row: Row<'_>, what: String, replaced: bool) {
        self.overrides.push(Override {
            file: file.name.into(),
            line: row.line(),
            what,
            replaced,
        });
    }
}

/// The columns of a, b, c; a table of original UNIFAC has a only.
struct InteractionColumns {
    a: Column,
    b: Option<Column>,
    c: Option<Column>,
}

impl InteractionColumns {
    fn find(table: &Table, suffix: &str) -> Result<Self, TableError> {
        let optional = |name: &str, unit| {
            let name = format!("{name}{suffix}");
            match table.optional_column(&name) {
                Some(_) => table.column_in(&name, unit).map(Some),
                None => Ok(None),
            }
        };
        Ok(Self {
            a: table.column_in(&format!("a{suffix}"), "K")?,
            b: optional("b", "-")?,
            c: optional("c", "1/K")?,
        })
    }

    fn required(&self, row: Row<'_>) -> Result<Interaction, TableError> {
        let number = |column: Option<Column>| column.map_or(Ok(0.0), |at| row.required_number(at));
        Ok(Interaction {
            a_k: row.required_number(self.a)?,
            b: number(self.b)?,
            c_per_k: number(self.c)?,
        })
    }

    /// `None` where a is blank; b and c may then not be given either.
    fn optional(&self, row: Row<'_>) -> Result<Option<Interaction>, TableError> {
        if row.text(self.a).is_empty() {
            for column in [self.b, self.c].into_iter().flatten() {
                if !row.text(column).is_empty() {
                    return Err(row.fault(self.a, "is blank beside a value"));
                }
            }
            return Ok(None);
        }
        self.required(row).map(Some)
    }
}

fn refuse_twice<K: Eq + Hash>(
    seen: &mut FxHashSet<K>,
    key: K,
    row: Row<'_>,
    column: Column,
) -> Result<(), TableError> {
    if seen.insert(key) {
        Ok(())
    } else {
        Err(row.fault(column, "stands twice in this file"))
    }
}

/// Whether the text is symbols with counts, halves allowed: `C1.5H3O1`.
fn is_formula(text: &str) -> bool {
    let mut rest = text;
    while !rest.is_empty() {
        let symbol = rest
            .char_indices()
            .take_while(|&(at, c)| {
                if at == 0 {
                    c.is_ascii_uppercase()
                } else {
                    c.is_ascii_lowercase()
                }
            })
            .count();
        if symbol == 0 {
            return false;
        }
        rest = &rest[symbol..];
        let digits = rest
            .bytes()
            .take_while(|byte| byte.is_ascii_digit() || *byte == b'.')
            .count();
        let count = &rest[..digits];
        let is_half_or_whole = count.is_empty()
            || count
                .parse::<f64>()
                .is_ok_and(|value| value > 0.0 && (2.0 * value).fract() == 0.0);
        if !is_half_or_whole {
            return false;
        }
        rest = &rest[digits..];
    }
    true
}

#[cfg(test)]
mod tests {
    use super::is_formula;

    #[test]
    fn formulas_with_halves_are_read() {
        for good in ["C2H3O2", "C1.5H3O1", "Si1", "C2H6O1S1", "C"] {
            assert!(is_formula(good), "{good}");
        }
        for bad in ["c2", "C1.25", "C2 H3", "2C", "C-1", "C0"] {
            assert!(!is_formula(bad), "{bad}");
        }
    }
}
