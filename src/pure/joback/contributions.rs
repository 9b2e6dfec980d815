//! The table of contributions and the linear half of the method.

use std::sync::Arc;

use super::{GROUPS, ID};
use crate::chem::Composition;
use crate::groups::GroupCounts;
use crate::pure::PureError;
use crate::quantity::Absent;
use crate::table::Table;

/// One column of contributions; a property may need several.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
#[repr(u8)]
pub enum Term {
    /// Critical temperature, dimensionless.
    Tc,
    /// Critical pressure, bar^−½.
    Pc,
    /// Critical volume, cm³/mol.
    Vc,
    /// Normal boiling point, K.
    Tb,
    /// Melting point, K.
    Tm,
    /// Ideal-gas enthalpy of formation at 298 K, kJ/mol.
    HForm,
    /// Ideal-gas Gibbs energy of formation at 298 K, kJ/mol.
    GForm,
    /// Ideal-gas heat capacity, constant term, J/(mol K).
    CpA,
    /// Ideal-gas heat capacity, term in T, J/(mol K²).
    CpB,
    /// Ideal-gas heat capacity, term in T², J/(mol K³).
    CpC,
    /// Ideal-gas heat capacity, term in T³, J/(mol K⁴).
    CpD,
    /// Enthalpy of fusion, kJ/mol.
    HFus,
    /// Enthalpy of vaporization at the normal boiling point, kJ/mol.
    HVap,
    /// Liquid viscosity, term in 1/T, K.
    EtaA,
    /// Liquid viscosity, constant term, dimensionless.
    EtaB,
}

impl Term {
    /// How many columns there are.
    pub const COUNT: usize = 15;

    /// Every column with its name and unit in the table file; `COLUMNS[t as usize].0 == t`.
    pub const COLUMNS: [(Self, &'static str, &'static str); Self::COUNT] = [
        (Self::Tc, "tc", "-"),
        (Self::Pc, "pc", "bar^-0.5"),
        (Self::Vc, "vc", "cm3/mol"),
        (Self::Tb, "tb", "K"),
        (Self::Tm, "tm", "K"),
        (Self::HForm, "hform", "kJ/mol"),
        (Self::GForm, "gform", "kJ/mol"),
        (Self::CpA, "cp_a", "J/(mol K)"),
        (Self::CpB, "cp_b", "J/(mol K2)"),
        (Self::CpC, "cp_c", "J/(mol K3)"),
        (Self::CpD, "cp_d", "J/(mol K4)"),
        (Self::HFus, "hfus", "kJ/mol"),
        (Self::HVap, "hvap", "kJ/mol"),
        (Self::EtaA, "eta_a", "K"),
        (Self::EtaB, "eta_b", "-"),
    ];
}

/// The linear half of the method: Σ count × contribution for every column, in
/// the printed units.
#[derive(Clone, Debug, PartialEq)]
pub struct LinearSums {
    values: [f64; Term::COUNT],
    /// Number of the first group without a contribution to the column; 0: none.
    blank: [u8; Term::COUNT],
}

impl LinearSums {
    /// Sums given as they stand, none of them blank: for bounds, which have no counts.
    pub const fn from_values(values: [f64; Term::COUNT]) -> Self {
        Self {
            values,
            blank: [0; Term::COUNT],
        }
    }

    /// The sum of a column, or the number of the first group that has none.
    pub fn get(&self, term: Term) -> Result<f64, u16> {
        match self.blank[term as usize] {
            0 => Ok(self.values[term as usize]),
            number => Err(u16::from(number)),
        }
    }
}

#[derive(Clone, Debug)]
struct Group {
    formula: Arc<str>,
    composition: Composition,
    ring: bool,
}

/// The printed contributions of the 41 groups.
#[derive(Clone, Debug)]
pub struct Contributions {
    /// By group number − 1; a blank cell is 0 here and has its bit in `blank`.
    values: Vec<[f64; Term::COUNT]>,
    blank: Vec<u16>,
    groups: Vec<Group>,
    unknown_number: Absent,
}

impl Contributions {
    /// The table that is built into the program.
    pub fn built_in() -> Self {
        Self::read(
            "groups/joback/contributions.csv",
            include_str!("../../../groups/joback/contributions.csv"),
        )
        .expect("the built-in table is read by a test")
    }

    /// Reads the table file.
    ///
    /// # Errors
    ///
    /// A missing column, another unit, a cell that is no number, groups that
    /// are not 1 to 41 in order.
    pub fn read(file: &str, text: &str) -> Result<Self, PureError> {
        let table = Table::read(file, text)?;
        let number = table.column("number")?;
        let formula = table.column("formula")?;
        let composition = table.column("composition")?;
        let ring = table.column("ring")?;
        let mut columns = Vec::with_capacity(Term::COUNT);
        for (_, name, unit) in Term::COLUMNS {
            columns.push(table.column_in(name, unit)?);
        }
        if table.rows().len() != GROUPS {
            return Err(PureError::Groups {
                file: file.to_owned(),
                expected: GROUPS,
                found: table.rows().len(),
            });
        }
        let mut values = Vec::with_capacity(GROUPS);
        let mut blank = Vec::with_capacity(GROUPS);
        let mut groups = Vec::with_capacity(GROUPS);
        for (position, row) in table.rows().enumerate() {
            if usize::from(row.required_integer(number)?) != position + 1 {
                return Err(row
                    .fault(number, format!("expected group {}", position + 1))
                    .into());
            }
            let mut cells = [0.0; Term::COUNT];
            let mut blanks = 0;
            for (at, &column) in columns.iter().enumerate() {
                match row.number(column)? {
                    Some(value) => cells[at] = value,
                    None => blanks |= 1 << at,
                }
            }
            values.push(cells);
            blank.push(blanks);
            groups.push(Group {
                formula: row.required_text(formula)?.into(),
                composition: Composition::from_formula(row.required_text(composition)?)
                    .ok_or_else(|| row.fault(composition, "is not a formula"))?,
                ring: match row.required_integer(ring)? {
                    0 => false,
                    1 => true,
                    _ => return Err(row.fault(ring, "is neither 0 nor 1").into()),
                },
            });
        }
        Ok(Self {
            values,
            blank,
            groups,
            unknown_number: Absent::Because(
                "the counts hold a number that is no group of Joback and Reid".into(),
            ),
        })
    }

    /// The linear half: sums of every column over the counts.
    ///
    /// # Errors
    ///
    /// A number that is not 1 to 41. A blank contribution is no error here: it
    /// makes only the properties absent that need it.
    pub fn sums(&self, counts: &GroupCounts) -> Result<LinearSums, Absent> {
        let mut sums = LinearSums::from_values([0.0; Term::COUNT]);
        for (number, count) in counts.iter() {
            let at = usize::from(number).wrapping_sub(1);
            let Some(values) = self.values.get(at) else {
                return Err(self.unknown_number.clone());
            };
            let times = f64::from(count);
            for (sum, value) in sums.values.iter_mut().zip(values) {
                *sum += times * value;
            }
            if self.blank[at] != 0 {
                for (term, first) in sums.blank.iter_mut().enumerate() {
                    if *first == 0 && self.blank[at] & (1 << term) != 0 {
                        *first = number as u8;
                    }
                }
            }
        }
        Ok(sums)
    }

    /// The printed contribution of a group; `None` where the cell is blank or there is no such group.
    pub fn contribution(&self, number: u16, term: Term) -> Option<f64> {
        let at = usize::from(number).checked_sub(1)?;
        (self.blank.get(at)? & (1 << term as usize) == 0).then(|| self.values[at][term as usize])
    }

    /// Formula of a group as printed.
    pub fn formula(&self, number: u16) -> Option<&str> {
        Some(&self.group(number)?.formula)
    }

    /// The atoms a group takes.
    pub fn composition(&self, number: u16) -> Option<&Composition> {
        Some(&self.group(number)?.composition)
    }

    /// Whether the group is one of the ring increments.
    pub fn is_ring_group(&self, number: u16) -> Option<bool> {
        Some(self.group(number)?.ring)
    }

    /// The atoms of all groups together; `None` for a number that is no group.
    pub fn atoms_of(&self, counts: &GroupCounts) -> Option<Composition> {
        let mut atoms = Composition::default();
        for (number, count) in counts.iter() {
            atoms.add_times(self.composition(number)?, count);
        }
        Some(atoms)
    }

    /// Why a property that needs the contribution of this group is absent.
    pub(super) fn no_contribution(&self, number: u16) -> Absent {
        Absent::NoContribution {
            method: ID,
            group: Arc::clone(&self.groups[usize::from(number) - 1].formula),
        }
    }

    fn group(&self, number: u16) -> Option<&Group> {
        self.groups.get(usize::from(number).checked_sub(1)?)
    }
}
