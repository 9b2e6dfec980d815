//! What the user's tables of measured data bring, told by `groupsmith check`.

use std::collections::BTreeSet;
use std::io::{self, Write};

use super::output;
use super::user_tables::file_of;
use crate::data::{Substance, Substances};
use crate::evaluate::{Library, UserTable};
use crate::quantity::unit::{self, reading_text, reading_unit};
use crate::quantity::{Dimension, Estimate, Property};
use crate::report::{TextColumn, TextTable};
use crate::table::Table;

/// Built-in values that are told one by one.
const SHOWN: usize = 20;

/// A value that a table states, whatever it is.
struct Stated<'t> {
    substance: &'t str,
    property: Property,
    /// Temperature in K at which it is looked at; a boiling point itself.
    temperature_k: f64,
}

/// What one table brought.
struct Brought<'t> {
    file: &'t str,
    rows: usize,
    substances: usize,
    properties: Vec<&'static str>,
    overridden: Vec<[String; 6]>,
}

/// Tells what each of the user's tables of measured data brought, and which
/// built-in values it overrides.
pub(super) fn tell(out: &mut impl Write, library: &Library) -> io::Result<()> {
    let built_in = Substances::built_in().expect("built-in tables are tested");
    let brought: Vec<Brought<'_>> = library
        .user_tables()
        .iter()
        .filter_map(|user| brought(user, library, &built_in))
        .collect();
    let mut table = TextTable::new([
        TextColumn::text("  file"),
        TextColumn::number("rows", ""),
        TextColumn::number("substances", ""),
        TextColumn::number("built-in values overridden", ""),
        TextColumn::text("properties"),
    ]);
    for one in &brought {
        table.add([
            format!("  {}", one.file),
            one.rows.to_string(),
            match one.substances {
                0 => String::new(),
                some => some.to_string(),
            },
            match one.overridden.len() {
                0 => String::new(),
                some => some.to_string(),
            },
            one.properties.join(", "),
        ]);
    }
    writeln!(out, "Your tables: sound")?;
    out.write_all(table.render(output::width()).as_bytes())?;
    let overridden: Vec<&[String; 6]> = brought.iter().flat_map(|one| &one.overridden).collect();
    if overridden.is_empty() {
        return Ok(());
    }
    writeln!(out, "\nBuilt-in values that yours override")?;
    let mut table = TextTable::new([
        TextColumn::text("  substance"),
        TextColumn::text("property"),
        TextColumn::number("at", "K"),
        TextColumn::number("built in", ""),
        TextColumn::number("yours", ""),
        TextColumn::text("unit"),
    ]);
    for cells in overridden.iter().take(SHOWN) {
        table.add((*cells).clone());
    }
    out.write_all(table.render(output::width()).as_bytes())?;
    if overridden.len() > SHOWN {
        writeln!(out, "  … and {} more", overridden.len() - SHOWN)?;
    }
    Ok(())
}

/// `None` for a table that is not about substances or pairs of them.
fn brought<'t>(
    user: &'t UserTable,
    library: &Library,
    built_in: &Substances,
) -> Option<Brought<'t>> {
    let (room, _) = user.place.split_once('/')?;
    if room != "substances" && room != "pairs" {
        return None;
    }
    let table = Table::read_user(&user.file, &user.text).ok()?;
    let stated = stated(&user.place, &table, library);
    let subject = table
        .optional_column("substance")
        .or_else(|| table.optional_column("name"));
    let substances: BTreeSet<&str> = subject
        .into_iter()
        .flat_map(|column| table.rows().map(move |row| row.text(column)))
        .filter_map(|text| library.substances().find(text).ok())
        .map(|substance| &**substance.name())
        .collect();
    let mut properties: Vec<&str> = Vec::new();
    let mut overridden = Vec::new();
    let mut looked_at: Vec<(&str, Property, f64)> = Vec::new();
    for one in stated {
        if !properties.contains(&one.property.id()) {
            properties.push(one.property.id());
        }
        let Ok(own) = library.substances().find(one.substance) else {
            continue;
        };
        let what = (&**own.name(), one.property, one.temperature_k);
        if looked_at.contains(&what) {
            continue;
        }
        looked_at.push(what);
        // a boiling point is a point of the vapor pressure too
        let also = (one.property == Property::BoilingPoint).then_some(Property::VaporPressure);
        for property in std::iter::once(one.property).chain(also) {
            let cells = self::overridden(own, built_in, property, one.temperature_k);
            overridden.extend(cells.filter(|cells| !overridden.contains(cells)));
        }
    }
    Some(Brought {
        file: file_of(&user.place),
        rows: table.rows().len(),
        substances: substances.len(),
        properties,
        overridden,
    })
}

/// The values of a table, as far as they are properties of a substance.
fn stated<'t>(place: &str, table: &'t Table, library: &Library) -> Vec<Stated<'t>> {
    let Some(substance) = table.optional_column("substance") else {
        return Vec::new();
    };
    let middle = |(low, high): (f64, f64)| (low + high) / 2.0;
    let curve_k = |text: &str, property: Property| {
        let own = library.substances().find(text).ok()?;
        match property {
            Property::VaporPressure => own.vapor_pressure().map(|curve| middle(curve.range_k())),
            _ => own.liquid_density().map(|curve| middle(curve.range_k())),
        }
    };
    let mut all = Vec::new();
    for row in table.rows() {
        let name = row.text(substance);
        let mut add = |property, temperature_k: Option<f64>| {
            all.push(Stated {
                substance: name,
                property,
                temperature_k: temperature_k.unwrap_or(0.0),
            });
        };
        match place {
            "substances/measured.csv" => {
                let property = table
                    .optional_column("property")
                    .and_then(|column| Property::from_id(row.text(column)));
                let temperature_k = table.optional_column("temperature").and_then(|column| {
                    let number = row.number(column).ok().flatten()?;
                    let text = format!("{number} {}", table.unit(column));
                    unit::parse(&text, Dimension::Temperature).ok()
                });
                let boiling_k = || {
                    let column = |name: &str| table.optional_column(name);
                    let text = format!(
                        "{} {}",
                        row.text(column("value")?),
                        row.text(column("unit")?)
                    );
                    unit::parse(&text, Dimension::Temperature).ok()
                };
                match property {
                    Some(Property::BoilingPoint) => add(Property::BoilingPoint, boiling_k()),
                    Some(property) => add(property, temperature_k),
                    None => {}
                }
            }
            "substances/hansen.csv" => {
                for property in [
                    Property::HansenDispersion,
                    Property::HansenPolar,
                    Property::HansenHydrogenBonding,
                ] {
                    add(property, None);
                }
            }
            "substances/vapor_pressure.csv" => {
                let property = Property::VaporPressure;
                add(property, curve_k(name, property));
            }
            "substances/density.csv" => {
                let property = Property::LiquidDensity;
                add(property, curve_k(name, property));
            }
            _ => {}
        }
    }
    all
}

/// The cells that tell of a built-in value that one of the user overrides.
fn overridden(
    own: &Substance,
    built_in: &Substances,
    property: Property,
    temperature_k: f64,
) -> Option<[String; 6]> {
    let known = built_in.find(own.name()).ok()?;
    let value = |substance: &Substance| -> Option<Estimate> {
        substance.measured(property, temperature_k)?.ok()
    };
    let (theirs, yours) = (value(known)?, value(own)?);
    if theirs == yours {
        return None;
    }
    let dimension = property.dimension();
    let at = match property.depends_on_temperature() {
        true => format!("{temperature_k:.2}"),
        false => String::new(),
    };
    Some([
        format!("  {}", own.name()),
        property.id().into(),
        at,
        reading_text(theirs.value, dimension),
        reading_text(yours.value, dimension),
        reading_unit(dimension)
            .map_or("", |unit| unit.symbol)
            .into(),
    ])
}
