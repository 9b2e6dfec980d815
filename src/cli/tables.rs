//! `groupsmith tables`.

use std::io::Write;

use super::args::{self, TablesWhat};
use super::error::CliError;
use super::exit::Exit;
use super::{output, pair_tables};
use crate::data::{HansenSphere, Substance, Substances};
use crate::evaluate::fitted_quantity;
use crate::evaluate::{FIGURES, Library};
use crate::groups::SetId;
use crate::mixture::{ActivityModel, Interaction, ModelStatus, RESERVED_MODELS, Unifac};
use crate::pure::fitted::{Fitted, Level, Quantity};
use crate::pure::{METHODS, Role};
use crate::quantity::unit::{self, nearest, si_symbol, table_text};
use crate::quantity::{Dimension, Property};
use crate::report::{TextColumn, TextTable};

pub(super) fn run(command: &args::Tables, library: &Library) -> Result<Exit, CliError> {
    let text = match &command.what {
        None => overview(library),
        Some(TablesWhat::Groups { set, number }) => groups(library, set, *number)?,
        Some(TablesWhat::Pair {
            model,
            first,
            second,
        }) => pair(library, model, *first, *second)?,
        Some(TablesWhat::Coverage { model }) => coverage(library, model)?,
        Some(TablesWhat::Methods { property: None }) => methods(),
        Some(TablesWhat::Methods {
            property: Some(property),
        }) => fitted_errors(property)?,
        Some(TablesWhat::Figures) => figures(),
        Some(TablesWhat::Substances { name }) => substances(library, name.as_deref())?,
        Some(TablesWhat::Pairs { first, second }) => {
            let asked: Vec<&str> = [first, second]
                .into_iter()
                .flatten()
                .map(String::as_str)
                .collect();
            pair_tables::text(library, &asked)?
        }
        Some(TablesWhat::Pieces) => super::assemble::pieces_text(library),
        Some(TablesWhat::Patterns) => include_str!("../groups/pattern/reference.md").to_owned(),
        Some(TablesWhat::Slips) => slips(library),
        Some(TablesWhat::Rules) => rules(library),
    };
    let mut out = output::stdout();
    out.write_all(text.as_bytes())?;
    out.flush()?;
    Ok(Exit::Done)
}

/// The group set of this name.
pub(super) fn set_named(name: &str) -> Result<SetId, CliError> {
    let known = SetId::ALL.map(SetId::id);
    SetId::from_id(name).ok_or_else(|| {
        CliError::Usage(format!(
            "there is no group set `{name}`{}\n  sets: {}",
            meant(name, known),
            known.join(", ")
        ))
    })
}

/// The name of a list that was meant, in words; empty where none is near.
pub(super) fn meant<'n>(name: &str, known: impl IntoIterator<Item = &'n str>) -> String {
    nearest(name, known).map_or(String::new(), |near| format!("; did you mean `{near}`?"))
}

fn unifac_named<'l>(library: &'l Library, name: &str) -> Result<&'l Unifac, CliError> {
    match ActivityModel::from_id(name) {
        Some(ModelStatus::BuiltIn(model)) => library
            .unifac(model)
            .ok_or_else(|| CliError::Usage(format!("the model `{name}` has no tables"))),
        Some(ModelStatus::Reserved) => Err(CliError::Usage(format!(
            "the model `{name}` is not built in yet"
        ))),
        None => {
            let with_tables = ["unifac", "unifac-dortmund", "unifac-dortmund-2006"];
            Err(CliError::Usage(format!(
                "there is no model `{name}`{}\n  models with tables: {}",
                meant(name, with_tables),
                with_tables.join(", ")
            )))
        }
    }
}

fn overview(library: &Library) -> String {
    let mut text = String::from("Group sets\n");
    let mut table = TextTable::new([
        TextColumn::text("  set"),
        TextColumn::number("groups", ""),
        TextColumn::number("patterns", ""),
        TextColumn::text("what it is"),
    ]);
    for set in SetId::ALL {
        let groups = library.set(set);
        table.add([
            format!("  {}", set.id()),
            groups.groups().len().to_string(),
            groups.patterns().len().to_string(),
            set.title().into(),
        ]);
    }
    text.push_str(&table.render(output::width()));
    text.push_str("\nActivity models\n");
    let mut table = TextTable::new([
        TextColumn::text("  model"),
        TextColumn::number("main groups", ""),
        TextColumn::number("pairs known", ""),
        TextColumn::number("of", ""),
        TextColumn::text("what it is"),
    ]);
    for model in ActivityModel::ALL {
        let cells = match library.unifac(model) {
            None => [String::new(), String::new(), String::new()],
            Some(unifac) => {
                let coverage = unifac.tables().coverage();
                [
                    unifac.tables().main_groups().len().to_string(),
                    coverage.known.to_string(),
                    coverage.possible.to_string(),
                ]
            }
        };
        let [mains, known, possible] = cells;
        table.add([
            format!("  {}", model.id()),
            mains,
            known,
            possible,
            model.title().into(),
        ]);
    }
    text.push_str(&table.render(output::width()));
    text.push_str("  reserved: ");
    text.push_str(&RESERVED_MODELS.map(|(id, _)| id).join(", "));
    text.push('\n');
    for model in ActivityModel::ALL {
        if let Some(unifac) = library.unifac(model) {
            text.push_str(&format!("\nSources of {}\n", model.id()));
            for source in unifac.tables().sources() {
                text.push_str(&format!("  {source}\n"));
            }
        }
    }
    text.push_str(&format!(
        "\nMeasured substances: {}\nMeasured pairs: {}\nPure-component methods: {}\nFigures for targets: {}\n",
        library.substances().len(),
        library.pairs().iter().count(),
        METHODS.len(),
        FIGURES.len()
    ));
    text.push_str(
        "\nMore: groupsmith tables groups SET [NUMBER], pair MODEL FIRST SECOND, coverage MODEL,\n\
         methods, figures, substances [NAME], pairs [FIRST [SECOND]], patterns, slips, rules\n",
    );
    text
}

/// Rules on structures, then reactions between components.
fn rules(library: &Library) -> String {
    let mut table = TextTable::new([
        TextColumn::text("rule"),
        TextColumn::text("verdict"),
        TextColumn::text("reason"),
        TextColumn::text("for example"),
        TextColumn::text("source"),
    ]);
    for rule in library.rules().iter() {
        let example = rule.conditions[0].example.clone();
        table.add([
            rule.name.clone(),
            rule.verdict.id().into(),
            rule.reason.clone(),
            example.unwrap_or_default(),
            rule.source.clone(),
        ]);
    }
    let mut text = table.render(output::width());
    text.push_str("\nSources of rules and reactions\n");
    for source in library.rules().sources() {
        text.push_str(&format!("  {source}\n"));
    }
    text.push_str("\nReactions between a candidate and a component\n");
    let mut table = TextTable::new([
        TextColumn::text("reaction"),
        TextColumn::text("what happens"),
        TextColumn::text("for example"),
        TextColumn::text("source"),
    ]);
    for reaction in library.reactions().iter() {
        table.add([
            reaction.name.clone(),
            reaction.reaction.clone(),
            reaction.examples.join(" + "),
            reaction.source.clone(),
        ]);
    }
    text.push_str(&table.render(output::width()));
    text
}

fn groups(library: &Library, name: &str, number: Option<u16>) -> Result<String, CliError> {
    let id = set_named(name)?;
    let set = library.set(id);
    let unifac = match id {
        SetId::Unifac => library.unifac(ActivityModel::Unifac),
        SetId::UnifacDortmund => library.unifac(ActivityModel::UnifacDortmund),
        SetId::Joback => None,
    };
    let subgroup = |number: u16| unifac.and_then(|unifac| unifac.tables().subgroup(number));
    let Some(number) = number else {
        let mut table = TextTable::new([
            TextColumn::number("number", ""),
            TextColumn::text("formula"),
            TextColumn::text("main group"),
            TextColumn::number("R", ""),
            TextColumn::number("Q", ""),
        ]);
        for group in set.groups() {
            let (main, r, q) = match subgroup(group.number) {
                Some(sub) => (
                    sub.main_group.to_string(),
                    sub.r.to_string(),
                    sub.q.to_string(),
                ),
                None => Default::default(),
            };
            table.add([
                group.number.to_string(),
                group.formula.to_string(),
                main,
                r,
                q,
            ]);
        }
        return Ok(table.render(output::width()));
    };
    let Some(group) = set.group(number) else {
        return Err(CliError::Usage(format!(
            "group set {} has no group {number}\n  `groupsmith tables groups {}` lists them",
            id.id(),
            id.id()
        )));
    };
    let mut text = format!("{} of {}: {}\n", number, id.id(), group.formula);
    if let Some(sub) = subgroup(number) {
        text.push_str(&format!(
            "  main group {}, R {}, Q {}\n",
            sub.main_group, sub.r, sub.q
        ));
    }
    if id == SetId::Joback {
        for (term, name, unit) in crate::pure::joback::Term::COLUMNS {
            let value = library.methods().joback.contribution(number, term);
            let value = value.map_or("not published".into(), |value| format!("{value} {unit}"));
            text.push_str(&format!("  {name}: {value}\n"));
        }
    }
    text.push_str("  patterns:\n");
    for (gives, pattern, example, line) in set.patterns() {
        if gives.count(number) > 0 {
            text.push_str(&format!("    {pattern}  gives {gives}"));
            if let Some(example) = example {
                text.push_str(&format!("  as in {example}"));
            }
            text.push_str(&format!("  (line {line})\n"));
        }
    }
    Ok(text)
}

fn pair(library: &Library, model: &str, first: u16, second: u16) -> Result<String, CliError> {
    let tables = unifac_named(library, model)?.tables();
    let name = |number: u16| {
        tables.main_group(number).map(|main| main.name.to_string()).ok_or_else(|| {
            CliError::Usage(format!(
                "{model} has no main group {number}\n  `groupsmith tables coverage {model}` lists them"
            ))
        })
    };
    let (one, other) = (name(first)?, name(second)?);
    let mut text = format!("{model}: main groups {first} ({one}) and {second} ({other})\n");
    for (i, j) in [(first, second), (second, first)] {
        match tables.pair(i, j) {
            None => text.push_str(&format!("  {i} to {j}: not published\n")),
            Some(pair) => {
                let used = pair.used;
                text.push_str(&format!("  {i} to {j}: {}\n", parameters(&used)));
                if let Some(slip) = pair.slip {
                    text.push_str(&format!(
                        "    as circulated: {}\n    {}\n",
                        parameters(&slip.circulated),
                        slip.reason
                    ));
                }
            }
        }
    }
    text.push_str("  sources:\n");
    for source in tables.sources() {
        text.push_str(&format!("    {source}\n"));
    }
    Ok(text)
}

fn parameters(pair: &Interaction) -> String {
    format!(
        "a = {} K, b = {}, c = {} 1/K",
        pair.a_k, pair.b, pair.c_per_k
    )
}

fn coverage(library: &Library, model: &str) -> Result<String, CliError> {
    let tables = unifac_named(library, model)?.tables();
    let coverage = tables.coverage();
    let mut text = format!(
        "{model}: {} of {} pairs of main groups are published\n",
        coverage.known, coverage.possible
    );
    let mut table = TextTable::new([
        TextColumn::number("number", ""),
        TextColumn::text("main group"),
        TextColumn::number("pairs known", ""),
        TextColumn::text("not published with"),
    ]);
    for main in tables.main_groups() {
        let others = tables
            .main_groups()
            .iter()
            .filter(|other| other.number != main.number);
        let (known, missing): (Vec<_>, Vec<_>) = others.partition(|other| {
            tables.pair(main.number, other.number).is_some()
                && tables.pair(other.number, main.number).is_some()
        });
        let missing: Vec<_> = missing
            .iter()
            .map(|other| other.number.to_string())
            .collect();
        table.add([
            main.number.to_string(),
            main.name.to_string(),
            known.len().to_string(),
            missing.join(" "),
        ]);
    }
    text.push_str(&table.render(output::width()));
    Ok(text)
}

fn methods() -> String {
    let mut table = TextTable::new([
        TextColumn::text("property"),
        TextColumn::text("method"),
        TextColumn::text("use"),
        TextColumn::text("source"),
    ]);
    for method in METHODS {
        table.add([
            method.property.id().into(),
            method.id.into(),
            match method.role {
                Role::Default => "default".into(),
                Role::Selectable => "in the library".into(),
            },
            method.source.into(),
        ]);
    }
    let mut text = table.render(output::width());
    let without: Vec<_> = Property::ALL
        .into_iter()
        .filter(|property| METHODS.iter().all(|method| method.property != *property))
        .map(Property::id)
        .collect();
    if !without.is_empty() {
        text.push_str(&format!(
            "without a method (measured values only): {}\n",
            without.join(", ")
        ));
    }
    text
}

/// What cross-validation found for the fitted estimates of a property, by family and size.
fn fitted_errors(property: &str) -> Result<String, CliError> {
    let known = Property::ALL.map(Property::id);
    let found = Property::from_id(property).ok_or_else(|| {
        CliError::Usage(format!(
            "there is no property `{property}`{}\n  `groupsmith tables methods` lists them",
            meant(property, known)
        ))
    })?;
    let quantities: &[Quantity] = match found {
        Property::LiquidDensity => &[Quantity::MolarVolume],
        Property::VaporPressure | Property::AcentricFactor => &[
            Quantity::BoilingPoint,
            Quantity::VaporPressureSlope,
            Quantity::CriticalTemperature,
            Quantity::CriticalPressure,
        ],
        Property::EnthalpyOfVaporization => &[Quantity::VaporPressureSlope, Quantity::BoilingPoint],
        found => match fitted_quantity(found) {
            Some(quantity) => &Quantity::ALL[quantity as usize..=quantity as usize],
            None => {
                return Ok(format!(
                    "{property} is not fitted; `groupsmith tables methods` tells what gives it\n"
                ));
            }
        },
    };
    let mut text = String::new();
    for &quantity in quantities {
        for level in Level::ALL {
            text.push_str(&format!("{} at {}\n", quantity.id(), level.id()));
            let mut table = TextTable::new([
                TextColumn::text("  class"),
                TextColumn::number("molecules", ""),
                TextColumn::number("mean", ""),
                TextColumn::number("median", ""),
                TextColumn::number("90th percentile", ""),
                TextColumn::number("bias", ""),
                TextColumn::text("unit"),
                TextColumn::number("in the interval", ""),
            ]);
            let (_, file) = Fitted::text(quantity, level);
            for line in file.lines() {
                let Some(cells) = line.strip_prefix("# error: ") else {
                    continue;
                };
                if let [class, unit, molecules, mean, median, p90, bias, coverage] =
                    cells.split(',').collect::<Vec<_>>()[..]
                {
                    table.add([
                        format!("  {class}"),
                        molecules.into(),
                        mean.into(),
                        median.into(),
                        p90.into(),
                        bias.into(),
                        unit.into(),
                        coverage.into(),
                    ]);
                }
            }
            text.push_str(&table.render(output::width()));
            text.push('\n');
        }
    }
    text.push_str(
        "Absolute errors of five-fold cross-validation on the project's reference data, no molecule,\n\
         stereoisomer or constitution on both sides; measured data off.\n",
    );
    Ok(text)
}

fn figures() -> String {
    let mut table = TextTable::new([
        TextColumn::text("figure"),
        TextColumn::text("unit"),
        TextColumn::text("what it is"),
    ]);
    for entry in &FIGURES {
        table.add([
            entry.figure.id.into(),
            si_symbol(entry.figure.dimension).into(),
            entry.title.into(),
        ]);
    }
    table.render(output::width())
}

fn substances(library: &Library, name: Option<&str>) -> Result<String, CliError> {
    let Some(name) = name else {
        let mut table = TextTable::new([
            TextColumn::text("name"),
            TextColumn::text("CAS"),
            TextColumn::text("SMILES"),
            TextColumn::text("vapor pressure"),
            TextColumn::text("density"),
        ]);
        for substance in library.substances().iter() {
            let range = |range: Option<(f64, f64)>| {
                range.map_or(String::new(), |(low, high)| {
                    format!("{low:.0} to {high:.0} K")
                })
            };
            table.add([
                substance.name().to_string(),
                substance.cas().map_or(String::new(), |cas| cas.to_string()),
                substance.smiles().to_owned(),
                range(substance.vapor_pressure().map(|curve| curve.range_k())),
                range(substance.liquid_density().map(|curve| curve.range_k())),
            ]);
        }
        return Ok(table.render(output::width()));
    };
    let substance = match library.substances().find(name) {
        Ok(substance) => substance,
        Err(error) => {
            let mut profiler = crate::evaluate::Profiler::new();
            let found = profiler
                .profile(library, name.trim())
                .ok()
                .and_then(|profile| library.known(&profile.keys));
            match found {
                Some(known) => known.substance,
                // a polymer, say, of which nothing but its sphere is known
                None => {
                    return library
                        .substances()
                        .hansen_sphere(name)
                        .map(|sphere| format!("{}\n{}", sphere.solute, sphere_line(sphere)))
                        .ok_or_else(|| CliError::Usage(error.to_string()));
                }
            }
        }
    };
    let mut text = format!("{}  {}\n", substance.name(), substance.smiles());
    if let Some(cas) = substance.cas() {
        text.push_str(&format!("  CAS {cas}\n"));
    }
    if !substance.synonyms().is_empty() {
        let synonyms: Vec<&str> = substance.synonyms().iter().map(|name| &**name).collect();
        text.push_str(&format!("  also: {}\n", synonyms.join("; ")));
    }
    text.push_str(&measured_of(library.substances(), substance));
    Ok(text)
}

/// Everything measured about a substance: numbers with the disagreements behind
/// them, curves, the check of the enthalpy of vaporization, supply.
fn measured_of(substances: &Substances, substance: &Substance) -> String {
    let mut text = String::new();
    for property in Property::ALL {
        for (position, constant) in substance.values(property).enumerate() {
            let state = [
                constant.temperature_k.map(|t| format!(" at {t} K")),
                constant
                    .pressure_pa
                    .map(|p| format!(" at {} kPa", p / 1000.0)),
            ];
            let not_used = substance
                .values(property)
                .take(position)
                .any(|other| other.is_of_same_state(constant));
            text.push_str(&format!(
                "  {}: {}{}{}  ({})\n",
                property.id(),
                table_text(constant.value, property.dimension()),
                state.into_iter().flatten().collect::<String>(),
                if not_used { ", not used" } else { "" },
                constant.source
            ));
        }
    }
    for curve in substance.vapor_pressures() {
        text.push_str(&curve_line(
            "vapor pressure in Pa",
            curve.range_k(),
            curve.equation(),
            curve.source(),
        ));
    }
    for curve in substance.liquid_densities() {
        text.push_str(&curve_line(
            "liquid density in kg/m3",
            curve.range_k(),
            curve.equation(),
            curve.source(),
        ));
    }
    for curve in substance.point_curves() {
        let property = curve.property();
        text.push_str(&curve_line(
            &format!("{} in {}", property.id(), si_symbol(property.dimension())),
            curve.range_k(),
            curve.points(),
            curve.source(),
        ));
    }
    text.push_str(&clapeyron_lines(substance));
    for conflict in substances.conflicts_of(substance) {
        let at = conflict
            .temperature_k
            .map_or(String::new(), |t| format!(" at {t} K"));
        let used = match &*conflict.used {
            "" => "none used".to_owned(),
            used => format!("{used} used ({})", conflict.used_source),
        };
        text.push_str(&format!(
            "  sources differ, {}{at} in {}: {used}, {} ({})\n    {}\n",
            conflict.property,
            conflict.unit,
            conflict.other,
            conflict.other_source,
            conflict.decision
        ));
    }
    if let Some(sphere) = substances.hansen_sphere(substance.name()) {
        text.push_str(&sphere_line(sphere));
    }
    for supply in substance.supplies() {
        let parts = [
            supply.price.as_ref().map(ToString::to_string),
            Some(supply.availability.to_string()),
            Some(supply.notes.to_string()),
        ];
        let parts: Vec<String> = parts
            .into_iter()
            .flatten()
            .filter(|part| !part.is_empty())
            .collect();
        text.push_str(&format!(
            "  supply: {}  ({})\n",
            parts.join("; "),
            supply.source
        ));
    }
    text
}

fn sphere_line(sphere: &HansenSphere) -> String {
    let [dispersion, polar, hydrogen_bonding] = sphere
        .centre_sqrt_pa
        .map(|value| unit::to_table(value, Dimension::SolubilityParameter));
    format!(
        "  Hansen sphere in MPa^0.5: centre {dispersion} {polar} {hydrogen_bonding}, radius {}  ({})\n",
        unit::to_table(sphere.radius_sqrt_pa, Dimension::SolubilityParameter),
        sphere.source
    )
}

fn curve_line(
    what: &str,
    (low, high): (f64, f64),
    equation: &dyn std::fmt::Display,
    source: &str,
) -> String {
    let range = if low < high {
        format!("from {low} K to {high} K")
    } else {
        format!("at {low} K")
    };
    format!("  {what} {range}: {equation}  ({source})\n")
}

/// Each measured enthalpy of vaporization beside that of the vapor-pressure curve.
fn clapeyron_lines(substance: &Substance) -> String {
    let property = Property::EnthalpyOfVaporization;
    let mut text = String::new();
    for constant in substance.values(property) {
        let boiling_k = || {
            let boiling = substance.measured(Property::BoilingPoint, 0.0)?;
            Some(boiling.ok()?.value)
        };
        let Some(temperature_k) = constant.temperature_k.or_else(boiling_k) else {
            continue;
        };
        match substance.clapeyron_enthalpy(temperature_k) {
            None => {}
            Some(Ok(found)) => text.push_str(&format!(
                "  {} at {temperature_k:.2} K by the vapor-pressure curve: {:.0} J/mol ({:+.1} %), delta Z {:.3}\n",
                property.id(),
                found.enthalpy_j_per_mol,
                100.0 * (found.enthalpy_j_per_mol / constant.value - 1.0),
                found.delta_z
            )),
            Some(Err(reason)) => text.push_str(&format!(
                "  {} at {temperature_k:.2} K by the vapor-pressure curve: not known ({reason})\n",
                property.id()
            )),
        }
    }
    text
}

fn slips(library: &Library) -> String {
    let mut text = String::new();
    for model in ActivityModel::ALL {
        let Some(unifac) = library.unifac(model) else {
            continue;
        };
        for slip in unifac.tables().slips() {
            text.push_str(&format!(
                "{}: main groups {} and {}\n  as circulated: {}\n  used: {}\n  why suspected: {}\n  what the choice rests on: {}\n",
                model.id(),
                slip.i,
                slip.j,
                parameters(&slip.circulated),
                slip.replacement
                    .as_ref()
                    .map_or("the circulated values, for want of better ones".into(), parameters),
                slip.reason,
                slip.evidence
            ));
        }
    }
    if text.is_empty() {
        text.push_str("no suspected slips are recorded\n");
    }
    text
}
