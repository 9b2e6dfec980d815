//! `groupsmith screen`.

use std::io::{self, Write};
use std::path::{Path, PathBuf};
use std::sync::Arc;
use std::time::{SystemTime, UNIX_EPOCH};

use super::args;
use super::error::CliError;
use super::exit::Exit;
use super::output::{self, Notes};
use super::progress::Progress;
use crate::brief::{Brief, Job};
use crate::evaluate::{CATALOG, Library, Plan, Scratch, Verdict};
use crate::groups::SetId;
use crate::mixture::Slips;
use crate::quantity::unit::{reading_unit, si_symbol, to_table};
use crate::quantity::{Status, number};
use crate::report::{TargetLabel, TextColumn, TextTable, outcome_text};
use crate::run::{
    BriefRecord, Fingerprint, RunRecord, StopFlag, TablesRecord, make_folder, remove_stale,
};
use crate::screen::{Columns, FILES, Pool, Screened, Screening};

pub(super) fn run(
    command: &args::Screen,
    library: Library,
    notes: Notes,
) -> Result<Exit, CliError> {
    if command.threads == Some(0) {
        return Err(CliError::Usage("--threads has to be at least 1".into()));
    }
    let plan = plan(&command.brief, library, !command.estimates_only)?;
    for note in &plan.notes {
        notes.say(&format!("note: {note}"));
    }
    let pool = open_pool(&plan)?;
    let folder = match &command.out {
        Some(folder) => folder.clone(),
        None => default_folder(&command.brief),
    };
    make_folder(&folder)?;
    remove_stale(&folder, &FILES)?;

    let stop = StopFlag::new();
    let raised = stop.clone();
    // Without a handler the run just cannot be stopped gently.
    let handled = ctrlc::set_handler(move || {
        if !raised.raise() {
            // Asked twice: end at once, leaving nothing in place.
            std::process::exit(Exit::Stopped as i32);
        }
    });
    if let Err(error) = handled {
        notes.say(&format!(
            "warning: Ctrl-C will end the run at once: {error}"
        ));
    }
    let progress = Progress::new(notes);
    let screening = Screening {
        plan: &plan,
        folder: &folder,
        threads: command.threads.unwrap_or(0),
        stop: &stop,
        listener: &progress,
    };
    let screened = screening.run(pool, record(&plan))?;

    let mut out = output::stdout();
    show(&mut out, &plan, &screened, &folder, command.show)?;
    if let Some(wanted) = &command.explain {
        writeln!(out)?;
        explain(&mut out, &plan, &screened, wanted)?;
    }
    out.flush()?;
    Ok(if screened.stopped {
        Exit::Stopped
    } else if screened.ranking.is_empty() {
        Exit::Nothing
    } else {
        Exit::Done
    })
}

/// Loads a brief and binds it.
pub(super) fn plan(file: &Path, library: Library, use_measured: bool) -> Result<Plan, CliError> {
    let brief = Brief::load(file, &CATALOG, Job::Screen)?;
    let name = brief.file.to_string();
    Plan::new(Arc::new(library), brief, use_measured)
        .map_err(|faults| CliError::Plan { file: name, faults })
}

/// Opens the pool of a plan.
pub(super) fn open_pool(plan: &Plan) -> Result<Pool, CliError> {
    let brief = &plan.brief;
    let settings = brief
        .pool
        .as_ref()
        .expect("a brief for screening has a pool");
    let smiles = settings
        .smiles_column
        .as_ref()
        .map(|column| column.value.as_str());
    let name = settings
        .name_column
        .as_ref()
        .map(|column| column.value.as_str());
    let default = Columns::default();
    let columns = Columns {
        smiles: smiles.unwrap_or(default.smiles),
        name: name.unwrap_or(default.name),
    };
    Ok(match brief.pool_path() {
        Some(path) => Pool::open(&path, columns)?,
        None => Pool::from_reader(Box::new(io::stdin()), "standard input", None, columns)?,
    })
}

/// `results/` and the name of the folder of the brief.
fn default_folder(brief: &Path) -> PathBuf {
    let full = std::fs::canonicalize(brief).unwrap_or_else(|_| brief.to_owned());
    let name = full
        .parent()
        .and_then(Path::file_name)
        .unwrap_or_else(|| "screen".as_ref());
    Path::new("results").join(name)
}

fn record(plan: &Plan) -> RunRecord {
    let tables = TablesRecord {
        fingerprint: plan
            .library
            .texts()
            .iter()
            .fold(Fingerprint::new(), |all, (name, text)| {
                all.with_section(name, text.as_bytes())
            }),
        of_user: plan
            .library
            .user_tables()
            .iter()
            .map(|table| table.place.clone())
            .collect(),
        choices: match plan.library.slips() {
            Slips::AsCirculated => vec!["parameter tables as circulated".into()],
            Slips::Corrected => Vec::new(),
        },
    };
    let brief = BriefRecord::new(&plan.brief.file, &plan.brief.text);
    let mut record = RunRecord::new("screen", brief, tables);
    record.models = plan.models().map(|model| model.id().to_owned()).collect();
    record.warnings.clone_from(&plan.notes);
    let now = SystemTime::now().duration_since(UNIX_EPOCH);
    record.timing.started_unix_s = now.map_or(0, |since| since.as_secs());
    record
}

fn show(
    out: &mut impl Write,
    plan: &Plan,
    screened: &Screened,
    folder: &Path,
    most: usize,
) -> io::Result<()> {
    writeln!(out, "{}", plan.brief.heading())?;
    writeln!(out)?;
    if !screened.ranking.is_empty() {
        let shown = screened.ranking.iter().take(most).enumerate();
        out.write_all(ranking_text(plan, shown).as_bytes())?;
        if screened.ranking.len() > most {
            writeln!(
                out,
                "… and {} more in ranked.csv",
                screened.ranking.len() - most
            )?;
        }
        writeln!(out)?;
    }
    let labels: Vec<TargetLabel<'_>> = plan
        .musts()
        .map(|(name, wanted)| TargetLabel { name, wanted })
        .collect();
    out.write_all(outcome_text(&screened.counts, &labels).as_bytes())?;
    writeln!(out)?;
    if screened.stopped {
        writeln!(
            out,
            "Stopped before the end of the pool: the files are marked unfinished."
        )?;
    }
    writeln!(
        out,
        "Files: {}",
        FILES
            .map(|file| folder.join(file).display().to_string())
            .join(", ")
    )?;
    writeln!(
        out,
        "Estimates are for choosing experiments. Before handling a candidate read its safety data\n\
         sheet (flammability, toxicity, peroxides) and follow local codes and licensed practice."
    )
}

/// The top of the ranking: the figures that targets are set on, with units.
fn ranking_text<'a>(
    plan: &Plan,
    rows: impl Iterator<Item = (usize, &'a crate::screen::Ranked)>,
) -> String {
    let mut shown: Vec<usize> = Vec::new();
    for target in &plan.targets {
        if !shown.contains(&target.figure) {
            shown.push(target.figure);
        }
    }
    // The same figures by the other models stand beside them.
    for &figure in &shown.clone() {
        shown.extend(
            plan.other_models(figure)
                .filter(|other| !shown.contains(other))
                .collect::<Vec<_>>(),
        );
    }
    let mut columns = vec![
        TextColumn::number("rank", ""),
        TextColumn::text("name"),
        TextColumn::number("score", ""),
    ];
    for &figure in &shown {
        let figure = &plan.figures[figure];
        let unit = reading_unit(figure.dimension).map_or("", |unit| unit.symbol);
        columns.push(TextColumn::number(figure.name.replace('_', " "), unit));
    }
    columns.push(TextColumn::text("remarks"));
    let mut table = TextTable::new(columns);
    for (rank, row) in rows {
        let name = if row.name.is_empty() {
            &row.smiles
        } else {
            &row.name
        };
        let mut cells = vec![
            (rank + 1).to_string(),
            name.clone(),
            match row.known > 0.0 {
                true => format!("{:.4}", row.score),
                false => "–".into(),
            },
        ];
        for &figure in &shown {
            let dimension = plan.figures[figure].dimension;
            cells.push(match row.figures[figure] {
                None => "–".into(),
                Some(value) => number::for_reading(match reading_unit(dimension) {
                    Some(unit) => unit.from_si(value),
                    None => value,
                }),
            });
        }
        cells.push(row.notes.clone());
        table.add(cells);
    }
    table.render(output::width())
}

/// Tells all about one candidate of the pool.
fn explain(
    out: &mut impl Write,
    plan: &Plan,
    screened: &Screened,
    wanted: &str,
) -> Result<(), CliError> {
    let mut scratch = Scratch::new();
    let mut profiler = crate::evaluate::Profiler::new();
    let full = plan
        .library
        .find(&mut profiler, wanted)
        .ok()
        .map(|(_, profile)| profile.keys.full);
    let mut found = None;
    if plan.brief.pool_path().is_some() {
        let mut pool = open_pool(plan)?;
        let mut batch = crate::screen::Batch::default();
        'pool: loop {
            pool.read_batch(&mut batch, 1024)?;
            if batch.is_empty() {
                break;
            }
            for index in 0..batch.len() {
                let line = batch.line(index);
                let Ok(smiles) = line.smiles else { continue };
                let same = line.name.eq_ignore_ascii_case(wanted.trim())
                    || full.as_ref().is_some_and(|full| {
                        profiler
                            .profile(&plan.library, smiles)
                            .is_ok_and(|profile| profile.keys.full == *full)
                    });
                if same {
                    found = Some((line.line, line.name.to_owned(), smiles.to_owned()));
                    break 'pool;
                }
            }
        }
    }
    let (line, name, smiles) = match (found, &full) {
        (Some((line, name, smiles)), _) => (Some(line), name, smiles),
        // Not of the pool: told all the same, as if it were.
        (None, Some(_)) => (None, wanted.trim().to_owned(), wanted.trim().to_owned()),
        (None, None) => {
            return Err(CliError::Usage(format!(
                "--explain: no candidate of the pool is called `{wanted}`, and it is no SMILES or known name"
            )));
        }
    };
    let smiles = match plan.library.substances().find(&smiles) {
        Ok(substance) => substance.smiles().to_owned(),
        Err(_) => smiles,
    };
    match line {
        Some(line) => writeln!(out, "{name}  {smiles}  (line {line})")?,
        None => writeln!(out, "{name}  {smiles}  (not in the pool)")?,
    }
    let verdict = match plan.evaluate(&mut scratch, &smiles) {
        Ok(verdict) => verdict,
        Err(error) => {
            writeln!(out, "  refused: {error}")?;
            return Ok(());
        }
    };
    let rank = line.and_then(|line| screened.ranking.iter().position(|row| row.line == line));
    let labels: Vec<_> = plan.labels().collect();
    match (&verdict, rank) {
        (Verdict::Qualified { score, .. }, Some(rank)) => {
            writeln!(out, "  rank {} with score {score:.4}", rank + 1)?;
        }
        (Verdict::Qualified { score, .. }, None) => {
            writeln!(
                out,
                "  qualified with score {score:.4}, but not in the ranking that is kept"
            )?;
        }
        (
            Verdict::Missed {
                label,
                value,
                dimension,
            },
            _,
        ) => {
            let (name, wanted) = labels[*label];
            let value = number::short(to_table(*value, *dimension));
            writeln!(
                out,
                "  not qualified: {name} is {value} {}, wanted {wanted}",
                si_symbol(*dimension)
            )?;
        }
        (Verdict::NotAssessable { label, reason }, _) => {
            let reason = scratch.explained(plan, reason);
            writeln!(out, "  not assessable: {}: {reason}", labels[*label].0)?;
        }
    }
    let remarks = plan.remarks(&mut scratch);
    if !remarks.is_empty() {
        writeln!(out, "  {remarks}")?;
    }
    for set in SetId::ALL {
        let profile = &scratch.profile;
        let groups = plan
            .library
            .set(set)
            .describe(&profile.counts[set as usize]);
        let gaps = profiler.gaps(&plan.library, profile, set);
        let gaps = if gaps.is_empty() {
            gaps
        } else {
            format!(" ({gaps})")
        };
        writeln!(out, "  {}: {groups}{gaps}", set.id())?;
    }
    let mut table = TextTable::new([
        TextColumn::text("figure"),
        TextColumn::number("value", ""),
        TextColumn::text("unit"),
        TextColumn::text("wanted"),
        TextColumn::number("desirability", ""),
        TextColumn::text("method"),
        TextColumn::text("detail"),
    ]);
    for (position, figure) in plan.figures.iter().enumerate() {
        let target = plan.targets.iter().find(|target| target.figure == position);
        let wanted = target.map_or(String::new(), |target| target.wanted.clone());
        let outcome = scratch.figures[position].clone();
        let row = match outcome {
            Ok(found) => {
                let desirability = target
                    .filter(|target| target.target.counts)
                    .map_or(String::new(), |target| {
                        format!("{:.3}", target.target.want.desirability(found.value))
                    });
                let method = match found.status {
                    Status::Measured => "measured",
                    Status::Estimated => found.method,
                };
                let mut detail = found.flags.to_string();
                if let Some(source) = &found.source {
                    if !detail.is_empty() {
                        detail.push_str("; ");
                    }
                    detail.push_str(source);
                }
                [
                    figure.name.clone(),
                    number::for_reading(to_table(found.value, figure.dimension)),
                    si_symbol(figure.dimension).into(),
                    wanted,
                    desirability,
                    method.into(),
                    detail,
                ]
            }
            Err(reason) => {
                let reason = scratch.explained(plan, &reason);
                [
                    figure.name.clone(),
                    "–".into(),
                    String::new(),
                    wanted,
                    String::new(),
                    String::new(),
                    reason.to_string(),
                ]
            }
        };
        table.add(row);
    }
    out.write_all(table.render(output::width()).as_bytes())?;
    Ok(())
}
