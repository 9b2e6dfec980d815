//! `groupsmith mixture`.

use std::io::Write;

use super::args::{self, Format};
use super::error::CliError;
use super::exit::Exit;
use super::output::{self, Notes};
use super::tables::meant;
use super::user_tables::Sources;
use crate::brief::{Basis, Brief, Job, checked_fractions};
use crate::evaluate::{
    CATALOG, DEFAULT_MODEL, MixtureComponent, MixtureFigure, Profiler, StatedState,
    describe_mixture, measured_at_dilution, mole_fractions,
};
use crate::mixture::{ActivityModel, ModelStatus};
use crate::quantity::unit;
use crate::quantity::{Absent, Dimension, REFERENCE_TEMPERATURE_K};
use crate::report::{MixtureRow, MixtureStatus, RowForm, mixture_text, write_rows};

/// What is asked, from the brief and the options over it.
struct Question {
    components: Vec<String>,
    fractions: Option<Vec<f64>>,
    basis: Basis,
    state: StatedState,
    models: Vec<ActivityModel>,
}

pub(super) fn run(
    command: &args::Mixture,
    sources: &Sources<'_>,
    notes: Notes,
) -> Result<Exit, CliError> {
    let brief = match &command.file {
        Some(file) => Some(Brief::load(file, &CATALOG, Job::Mixture)?),
        None => None,
    };
    let library = &sources.library(brief.as_ref())?;
    let question = question(command, brief)?;
    let mut profiler = Profiler::new();
    let use_measured = !command.estimates_only;
    let components: Vec<MixtureComponent> = question
        .components
        .iter()
        .map(|text| MixtureComponent::find(library, &mut profiler, text, use_measured))
        .collect::<Result<_, _>>()?;
    if let Some(second) = (1..components.len()).find(|&second| {
        components[..second]
            .iter()
            .any(|first| first.profile.keys.full == components[second].profile.keys.full)
    }) {
        return Err(CliError::Usage(format!(
            "component {} is the same molecule as an earlier one; name each once",
            second + 1
        )));
    }
    let fractions = match &question.fractions {
        Some(fractions) => {
            checked_fractions(fractions, components.len()).map_err(CliError::Fractions)?
        }
        None if components.len() == 1 => vec![1.0],
        None => {
            return Err(CliError::Usage(
                "the mixture has no composition\n  give --fractions, one for each component, such as 0.4,0.6"
                    .into(),
            ));
        }
    };
    let volume_at_k = question
        .state
        .temperature_k
        .unwrap_or(REFERENCE_TEMPERATURE_K);
    let x = mole_fractions(
        library,
        &components,
        &fractions,
        question.basis,
        volume_at_k,
    )
    .map_err(|reason| CliError::Usage(format!("the composition cannot be converted: {reason}")))?;

    let mut figures: Vec<MixtureFigure> = question
        .models
        .iter()
        .flat_map(|&model| describe_mixture(library, &components, &x, question.state, model))
        .collect();
    let boiling_k = || {
        let found = figures
            .iter()
            .find(|figure| figure.quantity == "bubble_temperature")?;
        found.value.as_ref().ok().copied().flatten()
    };
    if let Some(temperature_k) = question.state.temperature_k.or_else(boiling_k) {
        figures.extend(measured_at_dilution(
            library,
            &components,
            &x,
            temperature_k,
        ));
    }
    let answered = figures.iter().any(|figure| figure.value.is_ok());
    let rows: Vec<MixtureRow<'_>> = figures.iter().map(row).collect();
    let mut out = output::stdout();
    match command.format {
        Format::Csv => write_rows(&mut out, RowForm::Csv, &rows)?,
        Format::Json => write_rows(&mut out, RowForm::Json, &rows)?,
        Format::Text => {
            let names: Vec<&str> = components
                .iter()
                .map(|component| &*component.name)
                .collect();
            for (name, x) in names.iter().zip(&x) {
                writeln!(out, "{name}: mole fraction {x:.6}")?;
            }
            out.write_all(mixture_text(&rows, &names, output::width()).as_bytes())?;
        }
    }
    out.flush()?;
    if components
        .iter()
        .any(|component| component.profile.facts.associates)
    {
        notes.say("note: a carboxylic acid is present; association in the vapor is not modelled, vapor-side figures are off");
    }
    Ok(if answered { Exit::Done } else { Exit::Nothing })
}

fn row(figure: &MixtureFigure) -> MixtureRow<'_> {
    let (value, status, detail) = match &figure.value {
        Ok(value) => {
            let status = match figure.measured {
                true => MixtureStatus::Measured,
                false => MixtureStatus::Calculated,
            };
            (*value, status, figure.remark.clone())
        }
        Err(reason @ Absent::NotConverged { .. }) => {
            (None, MixtureStatus::NotConverged, reason.to_string())
        }
        Err(reason) => (None, MixtureStatus::NotAssessable, reason.to_string()),
    };
    MixtureRow {
        quantity: figure.quantity,
        component: figure.component.map(|component| component as u32 + 1),
        value,
        unit: figure.unit,
        model: figure.model.map_or("measured", ActivityModel::id),
        status,
        detail,
        low: figure.interval.map(|(low, _)| low),
        high: figure.interval.map(|(_, high)| high),
    }
}

fn question(command: &args::Mixture, brief: Option<Brief>) -> Result<Question, CliError> {
    let quantity = |text: &Option<String>, argument, dimension| match text {
        None => Ok(None),
        Some(text) => unit::parse(text, dimension)
            .map(Some)
            .map_err(|fault| CliError::Quantity { argument, fault }),
    };
    let mut question = Question {
        components: command.components.clone(),
        fractions: command.fractions.as_deref().map(fractions).transpose()?,
        basis: Basis::Mole,
        state: StatedState {
            temperature_k: quantity(
                &command.temperature,
                "--temperature",
                Dimension::Temperature,
            )?,
            pressure_pa: quantity(&command.pressure, "--pressure", Dimension::Pressure)?,
        },
        models: models(&command.models)?,
    };
    if let Some(brief) = brief.and_then(|brief| brief.mixture) {
        if question.components.is_empty() {
            question.components = brief
                .components
                .into_iter()
                .map(|text| text.value)
                .collect();
            if question.fractions.is_none() {
                question.fractions = brief.fractions.map(|fractions| fractions.value);
                question.basis = brief.basis;
            }
        }
        let state = &mut question.state;
        if state.temperature_k.is_none() && state.pressure_pa.is_none() {
            state.temperature_k = brief.temperature_k.map(|t| t.value);
            state.pressure_pa = brief.pressure_pa.map(|p| p.value);
        }
        if question.models.is_empty() {
            question.models = models(
                &brief
                    .models
                    .iter()
                    .map(|name| name.value.to_owned())
                    .collect::<Vec<_>>(),
            )?;
        }
    }
    if let Some(basis) = &command.basis {
        question.basis = Basis::from_id(basis).ok_or_else(|| {
            CliError::Usage(format!(
                "`--basis {basis}` is not known\n  a basis is mole, mass or volume"
            ))
        })?;
    }
    if question.models.is_empty() {
        question.models.push(DEFAULT_MODEL);
    }
    if question.components.is_empty() {
        return Err(CliError::Usage(
            "no component is given\n  give a brief with a [mixture], or --component once for each"
                .into(),
        ));
    }
    if question.state.temperature_k.is_none() && question.state.pressure_pa.is_none() {
        return Err(CliError::Usage(
            "neither temperature nor pressure is given\n  give --temperature \"25 degC\", --pressure \"1 atm\", or both"
                .into(),
        ));
    }
    for (what, value) in [
        ("--temperature", question.state.temperature_k),
        ("--pressure", question.state.pressure_pa),
    ] {
        if value.is_some_and(|value| value <= 0.0) {
            return Err(CliError::Usage(format!("{what} has to be above zero")));
        }
    }
    Ok(question)
}

fn fractions(text: &str) -> Result<Vec<f64>, CliError> {
    text.split(',')
        .map(|part| {
            part.trim().parse::<f64>().map_err(|_| {
                CliError::Usage(format!(
                    "`--fractions {text}`: `{}` is not a number\n  give numbers joined by commas, such as 0.4,0.6",
                    part.trim()
                ))
            })
        })
        .collect()
}

fn models(names: &[String]) -> Result<Vec<ActivityModel>, CliError> {
    let built_in = ActivityModel::ALL.map(ActivityModel::id);
    let mut models = Vec::new();
    for name in names {
        let model = match ActivityModel::from_id(name) {
            Some(ModelStatus::BuiltIn(model)) => model,
            Some(ModelStatus::Reserved) => {
                return Err(CliError::Usage(format!(
                    "the model `{name}` is not built in yet\n  built in: {}",
                    built_in.join(", ")
                )));
            }
            None => {
                return Err(CliError::Usage(format!(
                    "there is no model `{name}`{}\n  models: {}",
                    meant(name, built_in),
                    built_in.join(", ")
                )));
            }
        };
        if !models.contains(&model) {
            models.push(model);
        }
    }
    Ok(models)
}
