//! Reads a layer of tables into the collection and checks it.

use std::collections::hash_map::Entry;
use std::sync::Arc;

use rustc_hash::{FxHashMap, FxHashSet};
use smallvec::smallvec;

use super::agreement::{DENSITY_MISS, Stated};
use super::cas::{CasFault, CasNumber};
use super::structure::{Match, StructureIndex};
use super::substance::{BOILING_POINT_MISS_K, is_normal_pressure, misses};
use super::substances::Named;
use super::vapor_pressure::{VaporPressureEquation, WagnerForm};
use super::{
    Conflict, Constant, DataError, DensityEquation, HansenSphere, LiquidDensity, Price, Substance,
    Substances, Supply, VaporPressure, name,
};
use crate::chem::{Canonicalizer, Composition, Keys, Molecule, Reader};
use crate::quantity::{Dimension, Property, unit};
use crate::table::{Column, Row, Table, TableError};

/// Faults after which the rest of a table is not read: it is of another kind.
const MOST_FAULTS: usize = 100;

/// A table file: its name for messages and its text.
#[derive(Clone, Copy, Debug)]
pub struct TableText<'a> {
    /// File name as shown in messages.
    pub file: &'a str,
    /// The whole text.
    pub text: &'a str,
}

/// The files of one layer; any of them may be missing.
///
/// `groups/substances/README.md` describes their columns.
#[derive(Clone, Copy, Debug, Default)]
pub struct Tables<'a> {
    /// Names, synonyms, CAS numbers, structures.
    pub substances: Option<TableText<'a>>,
    /// Single measured numbers.
    pub measured: Option<TableText<'a>>,
    /// Hansen parameters, three a row.
    pub hansen: Option<TableText<'a>>,
    /// Vapor-pressure coefficients.
    pub vapor_pressure: Option<TableText<'a>>,
    /// Density coefficients and values.
    pub density: Option<TableText<'a>>,
    /// Spheres of good solvents, one solute a row.
    pub hansen_spheres: Option<TableText<'a>>,
    /// Prices, availability, notes.
    pub supply: Option<TableText<'a>>,
    /// Disagreements between sources.
    pub conflicts: Option<TableText<'a>>,
}

impl<'a> Tables<'a> {
    /// The files there are, in the order in which they are read.
    pub(super) fn texts(&self) -> Vec<TableText<'a>> {
        [
            self.substances,
            self.measured,
            self.hansen,
            self.vapor_pressure,
            self.density,
            self.hansen_spheres,
            self.supply,
            self.conflicts,
        ]
        .into_iter()
        .flatten()
        .collect()
    }
}

/// What one layer has brought so far.
pub(super) struct Layer<'a> {
    pub(super) all: &'a mut Substances,
    pub(super) faults: Vec<TableError>,
    pub(super) reader: Reader,
    pub(super) molecule: Molecule,
    /// Whether the layer is a user's: its form is less strict, its numbers are
    /// compared with those already there.
    pub(super) of_user: bool,
    /// Numbers to be looked at again when the layer is read to its end.
    pub(super) stated: Vec<Stated>,
    canonicalizer: Canonicalizer,
    keys: Keys,
    /// The structures so far, if they are to be compared.
    structures: Option<StructureIndex>,
    /// Substances that stand in this layer's list.
    listed: FxHashSet<u32>,
    /// Number of values of this layer at the head of each substance's lists.
    fresh: FxHashMap<(u32, Kind), usize>,
}

#[derive(Clone, Copy, PartialEq, Eq, Hash)]
pub(super) enum Kind {
    Constants,
    VaporPressures,
    Densities,
    PointCurves,
    Supplies,
}

/// Adds a layer to the substances. Given an index of the structures so far, it
/// checks new structures against it and gives it back with them added.
pub(super) fn load(
    all: &mut Substances,
    tables: &Tables<'_>,
    structures: Option<StructureIndex>,
) -> Result<Option<StructureIndex>, DataError> {
    let mut layer = Layer {
        all,
        faults: Vec::new(),
        reader: Reader::new(),
        molecule: Molecule::default(),
        of_user: structures.is_some(),
        stated: Vec::new(),
        canonicalizer: Canonicalizer::new(),
        keys: Keys::default(),
        structures,
        listed: FxHashSet::default(),
        fresh: FxHashMap::default(),
    };
    layer.read(tables.substances, Layer::substances);
    layer.read(tables.measured, Layer::measured);
    layer.read(tables.hansen, Layer::hansen);
    layer.read(tables.vapor_pressure, Layer::vapor_pressure);
    layer.read(tables.density, Layer::density);
    layer.read(tables.hansen_spheres, Layer::hansen_spheres);
    layer.read(tables.supply, Layer::supply);
    layer.read(tables.conflicts, Layer::conflicts);
    layer.agree();
    let mut faults = layer.faults;
    if faults.is_empty() {
        return Ok(layer.structures);
    }
    // some are found at the end, but a reader mends file by file
    let files = tables.texts();
    faults.sort_by_key(|fault| {
        let (file, line) = fault.place();
        (files.iter().position(|text| text.file == file), line)
    });
    Err(DataError::Tables { faults })
}

/// The sources that the head of a table names: `key: reference`.
pub(super) struct Sources<'a>(FxHashMap<&'a str, Arc<str>>);

impl<'a> Sources<'a> {
    pub(super) fn of(table: &'a Table) -> Self {
        Self(
            table
                .facts("source")
                .filter_map(|fact| fact.split_once(": "))
                .map(|(key, reference)| (key, Arc::from(reference)))
                .collect(),
        )
    }

    /// The reference a cell stands for; a text that is no key stands for itself.
    pub(super) fn get(&self, row: Row<'_>, column: Column) -> Result<Arc<str>, TableError> {
        let text = row.required_text(column)?;
        Ok(self.0.get(text).map_or_else(|| Arc::from(text), Arc::clone))
    }
}

impl Layer<'_> {
    fn read(
        &mut self,
        text: Option<TableText<'_>>,
        rows: impl Fn(&mut Self, &Table) -> Result<(), TableError>,
    ) {
        let Some(TableText { file, text }) = text else {
            return;
        };
        let read = if self.of_user {
            Table::read_user
        } else {
            Table::read
        };
        if let Err(fault) = read(file, text).and_then(|table| rows(self, &table)) {
            self.faults.push(fault);
        }
    }

    fn each_row(
        &mut self,
        table: &Table,
        mut one: impl FnMut(&mut Self, Row<'_>) -> Result<(), TableError>,
    ) {
        let before = self.faults.len();
        for row in table.rows() {
            let Err(mut fault) = one(self, row) else {
                continue;
            };
            let is_last = self.faults.len() - before + 1 == MOST_FAULTS;
            if let TableError::Cell { fault: text, .. } = &mut fault
                && is_last
            {
                text.push_str("; the rest of the table is not read before these rows are mended");
            }
            self.faults.push(fault);
            if is_last {
                break;
            }
        }
    }

    fn find(&self, row: Row<'_>, column: Column) -> Result<u32, TableError> {
        let text = row.required_text(column)?;
        self.all
            .position(text)
            .map_err(|error| row.fault(column, error.to_string()))
    }

    /// Where the next value of this layer goes: behind the layer's own, before older ones.
    pub(super) fn place(&mut self, substance: u32, kind: Kind) -> usize {
        let fresh = self.fresh.entry((substance, kind)).or_default();
        *fresh += 1;
        *fresh - 1
    }

    pub(super) fn fresh(&self, substance: u32, kind: Kind) -> usize {
        self.fresh.get(&(substance, kind)).copied().unwrap_or(0)
    }

    // ------------------------------------------------------------ substances

    fn substances(&mut self, table: &Table) -> Result<(), TableError> {
        table.knows_only(&[
            "name", "synonyms", "cas", "smiles", "formula", "family", "notes",
        ])?;
        let columns = SubstanceColumns {
            name: table.column("name")?,
            synonyms: table.column("synonyms")?,
            cas: table.column("cas")?,
            smiles: table.column("smiles")?,
            formula: table.column("formula")?,
            family: table.optional_column("family"),
        };
        self.each_row(table, |layer, row| layer.substance(row, &columns));
        Ok(())
    }

    fn substance(&mut self, row: Row<'_>, columns: &SubstanceColumns) -> Result<(), TableError> {
        let name = row.required_text(columns.name)?;
        let cas = match row.text(columns.cas) {
            "" => None,
            text => Some(CasNumber::parse_or_fault(text).map_err(|fault| {
                row.fault(
                    columns.cas,
                    match fault {
                        CasFault::Form => "is not a CAS number".to_owned(),
                        CasFault::CheckDigit { expected } => {
                            format!("has a wrong check digit: {expected} would fit")
                        }
                    },
                )
            })?),
        };
        let by_name = match self.all.by_name.get(name::folded(name).as_str()) {
            Some(Named::One(position)) => Some(*position),
            Some(Named::Several(_)) => {
                return Err(row.fault(columns.name, "is in use for several substances"));
            }
            None => None,
        };
        let by_cas = cas.and_then(|cas| self.all.by_cas.get(&cas).copied());
        let known = match (by_name, by_cas) {
            (Some(a), Some(b)) if a != b => {
                return Err(row.fault(
                    columns.cas,
                    format!(
                        "belongs to `{}`, while the name belongs to `{}`",
                        self.all.substances[b as usize].name, self.all.substances[a as usize].name
                    ),
                ));
            }
            (a, b) => a.or(b),
        };
        let (known, column) = match known {
            Some(position) if by_cas.is_some() => (Some(position), columns.cas),
            Some(position) => (Some(position), columns.name),
            None => (self.known_structure(row, columns)?, columns.smiles),
        };
        let position = match known {
            Some(position) if self.listed.contains(&position) => {
                let name = &self.all.substances[position as usize].name;
                return Err(row.fault(column, format!("stands twice: it is `{name}` already")));
            }
            Some(position) => {
                self.check_structure(row, columns, position)?;
                position
            }
            None => self.new_substance(row, columns, name),
        };
        self.listed.insert(position);
        let substance = &mut self.all.substances[position as usize];
        if let Some(cas) = cas {
            match substance.cas {
                Some(other) if other != cas => {
                    let fault = format!("`{}` has the CAS number {other}", substance.name);
                    return Err(row.fault(columns.cas, fault));
                }
                _ => substance.cas = Some(cas),
            }
            self.all.by_cas.insert(cas, position);
        }
        if let Some(family) = columns.family.map(|column| row.text(column))
            && !family.is_empty()
        {
            substance.family = Some(Arc::from(family));
        }
        self.name_it(row, columns.name, name, position)?;
        for synonym in row.text(columns.synonyms).split(';').map(str::trim) {
            if let Some(shared) = synonym.strip_suffix('?') {
                self.share_name(row, columns.synonyms, shared, position)?;
            } else if !synonym.is_empty() {
                self.name_it(row, columns.synonyms, synonym, position)?;
            }
        }
        Ok(())
    }

    /// Reads the structure of a row whose names are new; gives the substance
    /// that has it already.
    fn known_structure(
        &mut self,
        row: Row<'_>,
        columns: &SubstanceColumns,
    ) -> Result<Option<u32>, TableError> {
        row.required_text(columns.smiles)?;
        self.read_structure(row, columns)?;
        let Some(structures) = &self.structures else {
            return Ok(None);
        };
        self.canonicalizer.keys_into(&self.molecule, &mut self.keys);
        Ok(match structures.find(&self.keys) {
            Some(Match::Full(position)) => Some(position),
            _ => None,
        })
    }

    /// Adds the substance whose structure was just read.
    fn new_substance(&mut self, row: Row<'_>, columns: &SubstanceColumns, name: &str) -> u32 {
        let position = self.all.substances.len() as u32;
        if let Some(structures) = &mut self.structures {
            structures.insert(position, &self.keys);
        }
        self.all.substances.push(Substance {
            name: Arc::from(name),
            synonyms: Vec::new(),
            family: None,
            cas: None,
            smiles: Arc::from(row.text(columns.smiles)),
            composition: self.molecule.composition(),
            molar_mass_kg_per_mol: self.molecule.molar_mass_kg_per_mol(),
            constants: Vec::new(),
            vapor_pressures: Vec::new(),
            densities: Vec::new(),
            point_curves: Vec::new(),
            supplies: Vec::new(),
            boils_by_curve: false,
            contradicted: Vec::new(),
        });
        position
    }

    /// Checks what a row says about a substance that another table lists
    /// already: nothing, the same formula, or the same constitution.
    fn check_structure(
        &mut self,
        row: Row<'_>,
        columns: &SubstanceColumns,
        position: u32,
    ) -> Result<(), TableError> {
        let known = &self.all.substances[position as usize];
        if row.text(columns.smiles).is_empty() {
            return if row.text(columns.formula).is_empty()
                || formula(row, columns)? == known.composition
            {
                Ok(())
            } else {
                let fault = format!("is not that of `{}`, {}", known.name, known.composition);
                Err(row.fault(columns.formula, fault))
            };
        }
        self.read_structure(row, columns)?;
        let Some(structures) = &self.structures else {
            return Ok(());
        };
        self.canonicalizer.keys_into(&self.molecule, &mut self.keys);
        let known = &self.all.substances[position as usize];
        match structures.find(&self.keys) {
            Some(Match::Full(found)) if found == position => Ok(()),
            _ => {
                let fault = format!("is not the structure of `{}`, {}", known.name, known.smiles);
                Err(row.fault(columns.smiles, fault))
            }
        }
    }

    /// Reads the structure of a row and compares it with the formula beside it.
    fn read_structure(
        &mut self,
        row: Row<'_>,
        columns: &SubstanceColumns,
    ) -> Result<(), TableError> {
        self.reader
            .read_into(row.text(columns.smiles), &mut self.molecule)
            .map_err(|error| row.fault(columns.smiles, error.to_string()))?;
        let structure = self.molecule.composition();
        if row.text(columns.formula).is_empty() || formula(row, columns)? == structure {
            Ok(())
        } else {
            Err(row.fault(
                columns.formula,
                format!("is not that of the SMILES, which is {structure}"),
            ))
        }
    }

    fn name_it(
        &mut self,
        row: Row<'_>,
        column: Column,
        name: &str,
        position: u32,
    ) -> Result<(), TableError> {
        let folded = name::folded(name);
        if folded.is_empty() || CasNumber::parse(name).is_some() {
            return Err(row.fault(column, format!("`{name}` will not do as a name")));
        }
        match self.all.by_name.entry(folded.into_boxed_str()) {
            Entry::Occupied(entry) => match entry.get() {
                Named::One(other) if *other == position => return Ok(()),
                Named::One(other) => {
                    let other = &self.all.substances[*other as usize].name;
                    return Err(
                        row.fault(column, format!("`{name}` is already a name of `{other}`"))
                    );
                }
                Named::Several(_) => {
                    return Err(
                        row.fault(column, format!("`{name}` is in use for several substances"))
                    );
                }
            },
            Entry::Vacant(entry) => {
                entry.insert(Named::One(position));
            }
        }
        let substance = &mut self.all.substances[position as usize];
        if *substance.name != *name {
            substance.synonyms.push(Arc::from(name));
        }
        Ok(())
    }

    fn share_name(
        &mut self,
        row: Row<'_>,
        column: Column,
        name: &str,
        position: u32,
    ) -> Result<(), TableError> {
        match self.all.by_name.entry(name::folded(name).into_boxed_str()) {
            Entry::Vacant(entry) => {
                entry.insert(Named::Several(smallvec![position]));
                Ok(())
            }
            Entry::Occupied(mut entry) => match entry.get_mut() {
                Named::Several(positions) => {
                    if !positions.contains(&position) {
                        positions.push(position);
                    }
                    Ok(())
                }
                Named::One(other) => {
                    let other = &self.all.substances[*other as usize].name;
                    Err(row.fault(column, format!("`{name}` is a name of `{other}` alone")))
                }
            },
        }
    }

    // -------------------------------------------------------------- constants

    fn measured(&mut self, table: &Table) -> Result<(), TableError> {
        let sources = Sources::of(table);
        let substance = table.column("substance")?;
        let property = table.column("property")?;
        let value = table.column("value")?;
        let unit = table.column("unit")?;
        table.knows_only(&[
            "substance",
            "property",
            "value",
            "unit",
            "temperature",
            "pressure",
            "source",
            "notes",
        ])?;
        let temperature = Given::of(table, "temperature", Dimension::Temperature)?;
        let pressure = Given::of(table, "pressure", Dimension::Pressure)?;
        let source = table.column("source")?;
        self.each_row(table, |layer, row| {
            let position = layer.find(row, substance)?;
            let quantity = Property::from_id(row.text(property))
                .filter(|&quantity| quantity != Property::MolarMass)
                .ok_or_else(|| row.fault(property, "is not a property that can be measured"))?;
            let constant = Constant {
                property: quantity,
                value: in_si(row, value, unit, quantity.dimension())?,
                temperature_k: temperature.map_or(Ok(None), |given| given.si(row))?,
                pressure_pa: pressure.map_or(Ok(None), |given| given.si(row))?,
                source: sources.get(row, source)?,
            };
            if quantity.depends_on_temperature() && constant.temperature_k.is_none() {
                let column = temperature.map_or(property, |given| given.column);
                return Err(row.fault(
                    column,
                    match temperature {
                        Some(_) => "is blank, and the property depends on it",
                        None => "depends on temperature, and there is no column `temperature`",
                    },
                ));
            }
            if let (Some(t), Some(given)) = (constant.temperature_k, temperature)
                && t <= 0.0
            {
                return Err(row.fault(given.column, "is not above absolute zero"));
            }
            if quantity == Property::BoilingPoint
                && constant.pressure_pa.is_none_or(|pressure| pressure <= 0.0)
            {
                return Err(match pressure {
                    Some(given) => row.fault(
                        given.column,
                        "has to be a positive number for a boiling point",
                    ),
                    None => row.fault(
                        property,
                        "needs its pressure, and there is no column `pressure`",
                    ),
                });
            }
            if must_be_positive(quantity) && constant.value <= 0.0 {
                return Err(row.fault(value, "is not positive"));
            }
            let looked_at_again = layer.of_user || quantity.depends_on_temperature();
            let stated = looked_at_again.then(|| Stated {
                substance: position,
                constant: constant.clone(),
                place: row.fault(value, ""),
            });
            layer.add_constant(row, property, position, constant)?;
            layer.stated.extend(stated);
            Ok(())
        });
        Ok(())
    }

    fn add_constant(
        &mut self,
        row: Row<'_>,
        column: Column,
        position: u32,
        constant: Constant,
    ) -> Result<(), TableError> {
        let fresh = self.fresh(position, Kind::Constants);
        let constants = &mut self.all.substances[position as usize].constants;
        let same = |other: &&Constant| other.is_of_same_state(&constant);
        if let Some(other) = constants[..fresh].iter().find(same) {
            return Err(row.fault(
                column,
                format!(
                    "stands twice for this substance: {} and {}",
                    other.value, constant.value
                ),
            ));
        }
        let is_normal_boiling_point = constant.is_normal_boiling_point();
        constants.insert(fresh, constant);
        if is_normal_boiling_point {
            self.all.substances[position as usize].boils_by_curve = false;
        }
        self.place(position, Kind::Constants);
        Ok(())
    }

    fn hansen(&mut self, table: &Table) -> Result<(), TableError> {
        let sources = Sources::of(table);
        let substance = table.column("substance")?;
        let parts = [
            (Property::HansenDispersion, "dispersion"),
            (Property::HansenPolar, "polar"),
            (Property::HansenHydrogenBonding, "hydrogen_bonding"),
        ];
        table.knows_only(&[
            "substance",
            "dispersion",
            "polar",
            "hydrogen_bonding",
            "source",
            "notes",
        ])?;
        let mut columns = Vec::with_capacity(parts.len());
        for (property, name) in parts {
            columns.push((property, Given::required(table, name, HANSEN)?));
        }
        let source = table.column("source")?;
        self.each_row(table, |layer, row| {
            let position = layer.find(row, substance)?;
            let source = sources.get(row, source)?;
            for &(property, given) in &columns {
                let column = given.column;
                let constant = Constant {
                    property,
                    value: given.hansen(row)?,
                    temperature_k: None,
                    pressure_pa: None,
                    source: Arc::clone(&source),
                };
                let stated = layer.of_user.then(|| Stated {
                    substance: position,
                    constant: constant.clone(),
                    place: row.fault(column, ""),
                });
                layer.add_constant(row, column, position, constant)?;
                layer.stated.extend(stated);
            }
            Ok(())
        });
        Ok(())
    }

    fn hansen_spheres(&mut self, table: &Table) -> Result<(), TableError> {
        let sources = Sources::of(table);
        table.knows_only(&[
            "solute",
            "dispersion",
            "polar",
            "hydrogen_bonding",
            "radius",
            "source",
            "notes",
        ])?;
        let solute = table.column("solute")?;
        let dispersion = Given::required(table, "dispersion", HANSEN)?;
        let polar = Given::required(table, "polar", HANSEN)?;
        let hydrogen_bonding = Given::required(table, "hydrogen_bonding", HANSEN)?;
        let radius = Given::required(table, "radius", HANSEN)?;
        let source = table.column("source")?;
        let mut seen = Vec::new();
        let mut fresh = Vec::new();
        self.each_row(table, |_, row| {
            let text = row.required_text(solute)?;
            let folded = name::folded(text);
            if seen.contains(&folded) {
                return Err(row.fault(solute, "stands twice"));
            }
            let radius_sqrt_pa = radius.hansen(row)?;
            if radius_sqrt_pa == 0.0 {
                return Err(row.fault(radius.column, "is not positive"));
            }
            fresh.push(HansenSphere {
                solute: Arc::from(text),
                centre_sqrt_pa: [
                    dispersion.hansen(row)?,
                    polar.hansen(row)?,
                    hydrogen_bonding.hansen(row)?,
                ],
                radius_sqrt_pa,
                source: sources.get(row, source)?,
            });
            seen.push(folded);
            Ok(())
        });
        self.all.spheres.splice(0..0, fresh);
        Ok(())
    }

    fn supply(&mut self, table: &Table) -> Result<(), TableError> {
        let sources = Sources::of(table);
        table.knows_only(&[
            "substance",
            "price",
            "price_unit",
            "availability",
            "notes",
            "source",
        ])?;
        let substance = table.column("substance")?;
        let price = table.optional_column("price");
        let price_unit = table.optional_column("price_unit");
        let availability = table.optional_column("availability");
        let notes = table.optional_column("notes");
        let source = table.column("source")?;
        let text = |row: Row<'_>, column: Option<Column>| {
            column.map_or_else(|| Arc::from(""), |column| Arc::from(row.text(column)))
        };
        self.each_row(table, |layer, row| {
            let position = layer.find(row, substance)?;
            let price = match price {
                Some(column) => match row.number(column)? {
                    Some(amount) => {
                        let unit = price_unit.map_or("", |column| row.text(column));
                        let fault = match amount < 0.0 {
                            true => (column, "is negative".to_owned()),
                            false => (
                                price_unit.unwrap_or(column),
                                format!("needs a unit of the form EUR/kg, found `{unit}`"),
                            ),
                        };
                        let price = Price::new(amount, unit);
                        Some(price.ok_or_else(|| row.fault(fault.0, fault.1))?)
                    }
                    None => None,
                },
                None => None,
            };
            let supply = Supply {
                price,
                availability: text(row, availability),
                notes: text(row, notes),
                source: sources.get(row, source)?,
            };
            let supplies = &layer.all.substances[position as usize].supplies;
            if supplies[..layer.fresh(position, Kind::Supplies)].contains(&supply) {
                return Err(row.fault(substance, "stands twice with the same words"));
            }
            let place = layer.place(position, Kind::Supplies);
            let at = &mut layer.all.substances[position as usize];
            at.supplies.insert(place, supply);
            Ok(())
        });
        Ok(())
    }

    // ----------------------------------------------------------------- curves

    fn vapor_pressure(&mut self, table: &Table) -> Result<(), TableError> {
        let sources = Sources::of(table);
        let columns = VaporPressureColumns::of(table)?;
        self.each_row(table, |layer, row| {
            let position = layer.find(row, columns.substance)?;
            let equation = columns.equation(row)?;
            let (low, high) = range(row, columns.low, columns.high)?;
            let source = sources.get(row, columns.source)?;
            let curve = VaporPressure::new(equation, low, high, source).map_err(|t| {
                row.fault(
                    columns.equation,
                    format!("gives no pressure that rises with temperature at {t:.2} K"),
                )
            })?;
            let curve = match layer.check_boiling_points(row, columns.equation, position, &curve)? {
                true => curve.contradicted(),
                false => curve,
            };
            let fresh = layer.fresh(position, Kind::VaporPressures);
            let before = &layer.all.substances[position as usize].vapor_pressures[..fresh];
            if before.iter().any(|other| {
                other.equation() == curve.equation() && other.range_k() == curve.range_k()
            }) {
                return Err(row.fault(columns.substance, "has this very curve already"));
            }
            let place = layer.place(position, Kind::VaporPressures);
            let curves = &mut layer.all.substances[position as usize].vapor_pressures;
            curves.insert(place, curve);
            Ok(())
        });
        Ok(())
    }

    /// Refuses a curve that misses a boiling point stated in its layer for a
    /// pressure it reaches; one of an older layer is overruled. Says whether one was.
    fn check_boiling_points(
        &mut self,
        row: Row<'_>,
        column: Column,
        position: u32,
        curve: &VaporPressure,
    ) -> Result<bool, TableError> {
        let fresh = self.fresh(position, Kind::Constants);
        let substance = &self.all.substances[position as usize];
        let mut overruled = Vec::new();
        // the preferred normal boiling point and every one at another pressure
        let mut normal_seen = false;
        for (at, constant) in substance.constants.iter().enumerate() {
            let point = match constant.property {
                Property::BoilingPoint => constant.pressure_pa.map(|p| (constant.value, p)),
                Property::VaporPressure => constant.temperature_k.map(|t| (t, constant.value)),
                _ => None,
            };
            let Some((temperature_k, pressure)) = point else {
                continue;
            };
            if constant.property == Property::BoilingPoint
                && is_normal_pressure(pressure)
                && std::mem::replace(&mut normal_seen, true)
            {
                continue;
            }
            if misses(curve, temperature_k, pressure, BOILING_POINT_MISS_K) {
                if at >= fresh {
                    overruled.push(constant.clone());
                    continue;
                }
                let gives = match curve.saturation_temperature_k(pressure) {
                    Ok(t) => format!("{t:.2} K"),
                    Err(error) => error.to_string(),
                };
                return Err(row.fault(
                    column,
                    format!(
                        "the curve gives {gives} at {} kPa, the stated boiling point is {temperature_k} K",
                        pressure / 1000.0,
                    ),
                ));
            }
        }
        let is_first = self.fresh(position, Kind::VaporPressures) == 0;
        for constant in &overruled {
            let is_boiling_point = constant.property == Property::BoilingPoint;
            let gives = match is_boiling_point {
                true => curve.saturation_temperature_k(constant.pressure_pa.unwrap_or(0.0)),
                false => curve.pressure_pa(constant.temperature_k.unwrap_or(0.0)),
            };
            if let Ok(gives) = gives {
                self.record(position, constant, gives, curve.source());
                self.all.substances[position as usize].boils_by_curve |=
                    is_first && constant.is_normal_boiling_point();
            }
        }
        Ok(!overruled.is_empty())
    }

    fn density(&mut self, table: &Table) -> Result<(), TableError> {
        let sources = Sources::of(table);
        let columns = DensityColumns::of(table)?;
        self.each_row(table, |layer, row| {
            let position = layer.find(row, columns.substance)?;
            let substance = &layer.all.substances[position as usize];
            let equation = columns.equation(row, substance.molar_mass_kg_per_mol)?;
            let (low, high) = range(row, columns.low, columns.high)?;
            let source = sources.get(row, columns.source)?;
            let curve = LiquidDensity::new(equation, low, high, source).ok_or_else(|| {
                row.fault(
                    columns.equation,
                    "gives a density that is not between 100 and 10000 kg/m3",
                )
            })?;
            layer.check_densities(row, columns.equation, position, &curve)?;
            let fresh = layer.fresh(position, Kind::Densities);
            let before = &layer.all.substances[position as usize].densities[..fresh];
            if before.iter().any(|other| {
                other.equation() == curve.equation() && other.range_k() == curve.range_k()
            }) {
                return Err(row.fault(columns.substance, "has this very curve already"));
            }
            let place = layer.place(position, Kind::Densities);
            let curves = &mut layer.all.substances[position as usize].densities;
            curves.insert(place, curve);
            Ok(())
        });
        Ok(())
    }

    /// Refuses a curve that contradicts a stated density or another curve of the
    /// substance in its layer; those of an older layer are overruled.
    fn check_densities(
        &mut self,
        row: Row<'_>,
        column: Column,
        position: u32,
        curve: &LiquidDensity,
    ) -> Result<(), TableError> {
        let substance = &self.all.substances[position as usize];
        let fresh = [Kind::Constants, Kind::Densities].map(|kind| self.fresh(position, kind));
        let stated = substance
            .constants
            .iter()
            .enumerate()
            .filter(|(_, constant)| constant.property == Property::LiquidDensity)
            .filter_map(|(at, constant)| {
                let older = at >= fresh[0];
                Some((
                    older,
                    constant.temperature_k?,
                    constant.value,
                    &constant.source,
                ))
            });
        let others = substance
            .densities
            .iter()
            .enumerate()
            .filter_map(|(at, other)| {
                let low = other.range_k().0.max(curve.range_k().0);
                let high = other.range_k().1.min(curve.range_k().1);
                if low > high {
                    return None;
                }
                // near a critical point two fits may part
                let t = low + 0.25 * (high - low);
                let density = other.density_kg_per_m3(t).ok()?;
                Some((at >= fresh[1], t, density, other.source()))
            });
        let mut overruled = None;
        for (older, t, density, source) in stated.chain(others) {
            if let Ok(ours) = curve.density_kg_per_m3(t)
                && (ours / density - 1.0).abs() > DENSITY_MISS
            {
                if older {
                    let constant = Constant::density(density, t, source);
                    overruled.get_or_insert((constant, ours));
                    continue;
                }
                return Err(row.fault(
                    column,
                    format!("the curve gives {ours:.1} kg/m3 at {t:.2} K, elsewhere it is {density:.1} kg/m3"),
                ));
            }
        }
        if let Some((constant, ours)) = overruled {
            self.record(position, &constant, ours, curve.source());
            self.all.substances[position as usize].contradicts(Property::LiquidDensity);
        }
        Ok(())
    }

    // -------------------------------------------------------------- conflicts

    fn conflicts(&mut self, table: &Table) -> Result<(), TableError> {
        let sources = Sources::of(table);
        let decisions: FxHashMap<&str, Arc<str>> = table
            .facts("decision")
            .filter_map(|fact| fact.split_once(": "))
            .map(|(key, text)| (key, Arc::from(text)))
            .collect();
        let substance = table.column("substance")?;
        let property = table.column("property")?;
        let temperature = table.column_in("temperature", "K")?;
        let used = table.column("used")?;
        let used_source = table.column("used_source")?;
        let other = table.column("other")?;
        let other_source = table.column("other_source")?;
        let unit = table.column("unit")?;
        let decision = table.column("decision")?;
        self.each_row(table, |layer, row| {
            let text = |column: Column| Arc::from(row.text(column));
            let conflict = Conflict {
                substance: layer.find(row, substance)? as usize,
                property: Arc::from(row.required_text(property)?),
                temperature_k: row.number(temperature)?,
                used: text(used),
                used_source: match row.text(used_source) {
                    "" => Arc::from(""),
                    _ => sources.get(row, used_source)?,
                },
                other: Arc::from(row.required_text(other)?),
                other_source: sources.get(row, other_source)?,
                unit: text(unit),
                decision: decisions
                    .get(row.required_text(decision)?)
                    .map(Arc::clone)
                    .ok_or_else(|| {
                        row.fault(decision, "is not explained in the head of the table")
                    })?,
            };
            layer.all.conflicts.push(conflict);
            Ok(())
        });
        Ok(())
    }
}

/// What a Hansen parameter measures.
const HANSEN: Dimension = Dimension::SolubilityParameter;

/// A column of one dimension, in whatever unit the units row names.
#[derive(Clone, Copy)]
struct Given<'t> {
    column: Column,
    symbol: &'t str,
    dimension: Dimension,
}

impl<'t> Given<'t> {
    /// The column, which may be missing.
    fn of(table: &'t Table, name: &str, dimension: Dimension) -> Result<Option<Self>, TableError> {
        match table.optional_column(name) {
            None => Ok(None),
            Some(_) => Self::required(table, name, dimension).map(Some),
        }
    }

    fn required(table: &'t Table, name: &str, dimension: Dimension) -> Result<Self, TableError> {
        let column = table.column(name)?;
        let symbol = table.unit(column);
        let given = Self {
            column,
            symbol,
            dimension,
        };
        // 300 is sound in every unit of every dimension
        match unit::parse(&format!("300 {symbol}"), dimension) {
            Ok(_) => Ok(given),
            Err(_) => Err(table.unit_fault(column, unit::si_symbol(dimension))),
        }
    }

    /// The number of a row in SI.
    fn si(self, row: Row<'_>) -> Result<Option<f64>, TableError> {
        let Some(number) = row.number(self.column)? else {
            return Ok(None);
        };
        to_si(number, self.symbol, self.dimension)
            .map(Some)
            .map_err(|fault| row.fault(self.column, fault))
    }

    /// A Hansen parameter in Pa^0.5.
    fn hansen(self, row: Row<'_>) -> Result<f64, TableError> {
        let value = self
            .si(row)?
            .ok_or_else(|| row.fault(self.column, "is blank"))?;
        if (0.0..=60_000.0).contains(&value) {
            Ok(value)
        } else {
            Err(row.fault(self.column, "is not between 0 and 60 MPa^0.5"))
        }
    }
}

fn formula(row: Row<'_>, columns: &SubstanceColumns) -> Result<Composition, TableError> {
    Composition::from_formula(row.text(columns.formula))
        .filter(|composition| *composition != Composition::default())
        .ok_or_else(|| row.fault(columns.formula, "is not a formula"))
}

struct SubstanceColumns {
    name: Column,
    synonyms: Column,
    cas: Column,
    smiles: Column,
    formula: Column,
    family: Option<Column>,
}

struct VaporPressureColumns {
    substance: Column,
    equation: Column,
    logarithm: Column,
    pressure_unit: Column,
    temperature_unit: Column,
    coefficients: [Column; 5],
    critical_temperature: Column,
    critical_pressure: Column,
    low: Column,
    high: Column,
    source: Column,
}

impl VaporPressureColumns {
    fn of(table: &Table) -> Result<Self, TableError> {
        Ok(Self {
            substance: table.column("substance")?,
            equation: table.column("equation")?,
            logarithm: table.column("logarithm")?,
            pressure_unit: table.column("pressure_unit")?,
            temperature_unit: table.column("temperature_unit")?,
            coefficients: [
                table.column("a")?,
                table.column("b")?,
                table.column("c")?,
                table.column("d")?,
                table.column("e")?,
            ],
            critical_temperature: table.column_in("critical_temperature", "K")?,
            critical_pressure: table.column_in("critical_pressure", "kPa")?,
            low: table.column_in("low", "K")?,
            high: table.column_in("high", "K")?,
            source: table.column("source")?,
        })
    }

    fn equation(&self, row: Row<'_>) -> Result<VaporPressureEquation, TableError> {
        let number = |index: usize| row.required_number(self.coefficients[index]);
        match row.text(self.equation) {
            "antoine" => {
                let log = match row.text(self.logarithm) {
                    "log10" => std::f64::consts::LN_10,
                    "ln" => 1.0,
                    _ => return Err(row.fault(self.logarithm, "should be log10 or ln")),
                };
                let unit_pa = match row.text(self.pressure_unit) {
                    "Pa" => 1.0,
                    "kPa" => 1e3,
                    "bar" => 1e5,
                    "mmHg" => 101_325.0 / 760.0,
                    _ => {
                        let fault = "should be Pa, kPa, bar or mmHg";
                        return Err(row.fault(self.pressure_unit, fault));
                    }
                };
                let zero_k = match row.text(self.temperature_unit) {
                    "K" => 0.0,
                    "degC" => 273.15,
                    _ => return Err(row.fault(self.temperature_unit, "should be K or degC")),
                };
                Ok(VaporPressureEquation::Antoine {
                    a: log * number(0)? + f64::ln(unit_pa),
                    b: log * number(1)?,
                    c: number(2)? - zero_k,
                })
            }
            form @ ("wagner-2.5-5" | "wagner-3-6") => Ok(VaporPressureEquation::Wagner {
                form: if form == "wagner-3-6" {
                    WagnerForm::ThreeSix
                } else {
                    WagnerForm::TwoAndAHalfFive
                },
                coefficients: [number(0)?, number(1)?, number(2)?, number(3)?],
                critical_temperature_k: positive(row, self.critical_temperature)?,
                critical_pressure_pa: 1e3 * positive(row, self.critical_pressure)?,
            }),
            "extended-antoine" => Ok(VaporPressureEquation::ExtendedAntoine {
                coefficients: [number(0)?, number(1)?, number(2)?, number(3)?, number(4)?],
            }),
            _ => Err(row.fault(
                self.equation,
                "should be antoine, wagner-2.5-5, wagner-3-6 or extended-antoine",
            )),
        }
    }
}

struct DensityColumns {
    substance: Column,
    equation: Column,
    coefficients: [Column; 4],
    critical_temperature: Column,
    critical_density: Column,
    low: Column,
    high: Column,
    source: Column,
}

impl DensityColumns {
    fn of(table: &Table) -> Result<Self, TableError> {
        Ok(Self {
            substance: table.column("substance")?,
            equation: table.column("equation")?,
            coefficients: [
                table.column("a")?,
                table.column("b")?,
                table.column("c")?,
                table.column("d")?,
            ],
            critical_temperature: table.column_in("critical_temperature", "K")?,
            critical_density: table.column_in("critical_density", "kg/m3")?,
            low: table.column_in("low", "K")?,
            high: table.column_in("high", "K")?,
            source: table.column("source")?,
        })
    }

    fn equation(
        &self,
        row: Row<'_>,
        molar_mass_kg_per_mol: f64,
    ) -> Result<DensityEquation, TableError> {
        let number = |index: usize| row.required_number(self.coefficients[index]);
        match row.text(self.equation) {
            "rackett-molar" => Ok(DensityEquation::Rackett {
                // mol/dm3 times g/mol is kg/m3
                a: number(0)? * 1000.0 * molar_mass_kg_per_mol,
                b: positive(row, self.coefficients[1])?,
                c: positive(row, self.coefficients[2])?,
                d: positive(row, self.coefficients[3])?,
            }),
            "critical-expansion" => Ok(DensityEquation::CriticalExpansion {
                coefficients: [number(0)?, number(1)?, number(2)?, number(3)?],
                critical_temperature_k: positive(row, self.critical_temperature)?,
                critical_density_kg_per_m3: positive(row, self.critical_density)?,
            }),
            "constant" => Ok(DensityEquation::Constant {
                density_kg_per_m3: positive(row, self.coefficients[0])?,
            }),
            _ => Err(row.fault(
                self.equation,
                "should be rackett-molar, critical-expansion or constant",
            )),
        }
    }
}

pub(super) fn positive(row: Row<'_>, column: Column) -> Result<f64, TableError> {
    let value = row.required_number(column)?;
    if value > 0.0 {
        Ok(value)
    } else {
        Err(row.fault(column, "is not positive"))
    }
}

fn range(row: Row<'_>, low: Column, high: Column) -> Result<(f64, f64), TableError> {
    let low_k = positive(row, low)?;
    let high_k = positive(row, high)?;
    if low_k < high_k {
        Ok((low_k, high_k))
    } else {
        Err(row.fault(
            high,
            format!("is not above the lower end of the range, {low_k} K"),
        ))
    }
}

/// The value of a cell in SI, whatever unit of the dimension stands beside it.
fn in_si(
    row: Row<'_>,
    value: Column,
    unit: Column,
    dimension: Dimension,
) -> Result<f64, TableError> {
    to_si(row.required_number(value)?, row.text(unit), dimension)
        .map_err(|fault| row.fault(unit, fault))
}

/// A number in a unit of the dimension, in SI and finite; else what is wrong with it.
fn to_si(number: f64, symbol: &str, dimension: Dimension) -> Result<f64, String> {
    let value = match dimension {
        Dimension::Number if symbol == "-" || symbol.is_empty() => number,
        // the common cases, kept from being written out and read again
        Dimension::SolubilityParameter if symbol == unit::si_symbol(dimension) => 1000.0 * number,
        Dimension::Pressure if symbol == "kPa" => 1000.0 * number,
        _ if symbol == unit::si_symbol(dimension) => number,
        _ => unit::parse(&format!("{number} {symbol}"), dimension)
            .map_err(|error| error.to_string())?,
    };
    if value.is_finite() {
        Ok(value)
    } else {
        Err("is not a finite number in SI".into())
    }
}

/// Whether a value of zero or less makes no sense.
fn must_be_positive(property: Property) -> bool {
    !matches!(
        property,
        Property::AcentricFactor
            | Property::IdealGasEnthalpyOfFormation
            | Property::IdealGasGibbsEnergyOfFormation
            | Property::HansenPolar
            | Property::HansenHydrogenBonding
            | Property::LogPOctanolWater
            | Property::HeatCapacityChangeOfFusion
    )
}
