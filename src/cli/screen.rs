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
use super::user_tables::Sources;
use crate::brief::{Brief, Job};
use crate::evaluate::{
    CATALOG, Judgement, Library, Plan, Scratch, Verdict, interval_that_counts, score_interval,
};
use crate::groups::SetId;
use crate::mixture::Slips;
use crate::quantity::unit::{reading_text, reading_unit};
use crate::quantity::{Estimate, Property, Status};
use crate::ranking::{BAND_CHANCE, NextMeasurement, Ranked, ranks};
use crate::report::{
    FigureColumn, RankedRow, RankedTable, TargetLabel, TextColumn, TextTable, missed_in_words,
    outcome_text, probability_in_words, ranks_in_words,
};
use crate::run::{
    BriefRecord, FileError, Fingerprint, RunRecord, StopFlag, TablesRecord, make_folder,
};
use crate::screen::{Batch, Columns, FILES, Pool, PoolError, Screened, Screening, StoppableReader};

/// Lines of the pool that are read at a time, where that is done here.
const BATCH_LINES: usize = 4096;

pub(super) fn run(
    command: &args::Screen,
    sources: &Sources<'_>,
    notes: Notes,
) -> Result<Exit, CliError> {
    if command.threads == Some(0) {
        return Err(CliError::Usage("--threads has to be at least 1".into()));
    }
    let brief = Brief::load(&command.brief, &CATALOG, Job::Screen)?;
    let library = sources.library(Some(&brief))?;
    let plan = bind(brief, library, !command.estimates_only)?;
    if let Some(wanted) = &command.explain {
        find_before_the_run(&plan, wanted.trim())?;
    }
    for note in &plan.notes {
        notes.say(&format!("note: {note}"));
    }
    let stop = stopped_by_signals(notes);
    let pool = match open_pool(&plan.brief, Some(&stop)) {
        Err(CliError::Pool(PoolError::Read { .. })) if stop.is_raised() => {
            notes.say("stopped before a line was read; no file is written");
            return Ok(Exit::Stopped);
        }
        pool => pool?,
    };
    for note in pool.notes() {
        notes.say(&format!("note: {note}"));
    }
    if command.explain.is_some() && pool.has_measured() && !can_be_read_twice(&plan) {
        notes.say(
            "note: --explain shows its figures without the measured columns of this pool, which can be read only once",
        );
    }
    let folder = match &command.out {
        Some(folder) => folder.clone(),
        None => default_folder(&command.brief),
    };
    make_folder(&folder)?;
    spare_input(&plan, &command.brief, &folder)?;
    let progress = Progress::new(notes);
    let screening = Screening {
        plan: &plan,
        folder: &folder,
        threads: command.threads.unwrap_or(0),
        stop: &stop,
        listener: &progress,
    };
    let screened = {
        let left_out = (
            command.estimates_only,
            "measured data of candidates left out",
        );
        screening.run(pool, record(&plan, "screen", &[left_out]))?
    };

    match tell(command, &plan, &screened, &folder) {
        // The files are there all the same, and the code tells of them.
        Ok(()) | Err(CliError::ClosedPipe) => {}
        Err(error) => return Err(error),
    }
    Ok(if screened.stopped {
        Exit::Stopped
    } else if screened.ranking.is_empty() {
        Exit::Nothing
    } else {
        Exit::Done
    })
}

/// A flag that Ctrl-C and SIGTERM raise.
pub(super) fn stopped_by_signals(notes: Notes) -> StopFlag {
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
    stop
}

/// Refuses to write over what is read.
fn spare_input(plan: &Plan, brief: &Path, folder: &Path) -> Result<(), CliError> {
    let full = |path: &Path| std::fs::canonicalize(path).ok();
    let inputs = [Some(brief.to_owned()), plan.brief.pool_path()];
    for input in inputs.iter().flatten() {
        let same =
            |file: &str| full(&folder.join(file)).is_some_and(|output| Some(output) == full(input));
        if let Some(file) = FILES.into_iter().find(|file| same(file)) {
            return Err(CliError::Usage(format!(
                "{} would be overwritten by the {file} of this run\n  choose another folder with --out",
                input.display()
            )));
        }
    }
    Ok(())
}

fn tell(
    command: &args::Screen,
    plan: &Plan,
    screened: &Screened,
    folder: &Path,
) -> Result<(), CliError> {
    let mut out = output::stdout();
    show(&mut out, plan, screened, folder, command.show)?;
    if let Some(wanted) = &command.explain {
        writeln!(out)?;
        explain(&mut out, plan, screened, folder, wanted)?;
    }
    out.flush()?;
    Ok(())
}

/// Binds a brief; what is wrong with its pool is told together with the rest.
pub(super) fn bind(brief: Brief, library: Library, use_measured: bool) -> Result<Plan, CliError> {
    let file = brief.file.to_string();
    // Only a regular file can be opened twice.
    let pool_fault = match brief.pool_path() {
        Some(path) if path.is_file() || !path.exists() => open_pool(&brief, None).err(),
        _ => None,
    };
    match (
        Plan::new(Arc::new(library), brief, use_measured),
        pool_fault,
    ) {
        (Ok(plan), None) => Ok(plan),
        (Ok(_), Some(fault)) => Err(fault),
        (Err(faults), pool) => Err(CliError::Plan {
            file,
            faults,
            pool: pool.map(|fault| fault.to_string()),
        }),
    }
}

/// Opens the pool of a brief; with a flag, standard input is left when it is raised.
pub(super) fn open_pool(brief: &Brief, stop: Option<&StopFlag>) -> Result<Pool, CliError> {
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
    let columns = Columns { smiles, name };
    Ok(match brief.pool_path() {
        Some(path) => Pool::open(&path, columns)?,
        None => {
            let source: Box<dyn io::Read + Send> = match stop {
                Some(stop) => Box::new(StoppableReader::new(io::stdin(), stop.clone())),
                None => Box::new(io::stdin()),
            };
            Pool::from_reader(source, "standard input", None, columns)?
        }
    })
}

/// `results/` and the name of the folder of the brief.
pub(super) fn default_folder(brief: &Path) -> PathBuf {
    let full = std::fs::canonicalize(brief).unwrap_or_else(|_| brief.to_owned());
    let name = full
        .parent()
        .and_then(Path::file_name)
        .unwrap_or_else(|| "screen".as_ref());
    Path::new("results").join(name)
}

/// The record of a run, with choices beside those of the tables.
pub(super) fn record(plan: &Plan, command: &str, more: &[(bool, &str)]) -> RunRecord {
    let as_circulated = plan.library.slips() == Slips::AsCirculated;
    let choices = [(as_circulated, "parameter tables as circulated")];
    let choices = choices.iter().chain(more);
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
        choices: choices
            .filter(|(taken, _)| *taken)
            .map(|(_, choice)| (*choice).to_owned())
            .collect(),
    };
    let brief = BriefRecord::new(&plan.brief.file, &plan.brief.text);
    let mut record = RunRecord::new(command, brief, tables);
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
        let shown = &screened.ranking[..most.min(screened.ranking.len())];
        out.write_all(ranking_text(plan, shown).as_bytes())?;
        if screened.ranking.len() > most {
            writeln!(
                out,
                "… and {} more in ranked.csv",
                screened.ranking.len() - most
            )?;
        }
        how_sure(out, plan, &screened.ranking, screened.next.as_ref())?;
        writeln!(out)?;
    }
    let musts = musts(plan);
    let labels: Vec<TargetLabel<'_>> = musts
        .iter()
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

/// Which candidates cannot be told apart from the first, and which measurement
/// would do most to tell them; nothing where all scores are exact and differ.
pub(super) fn how_sure(
    out: &mut impl Write,
    plan: &Plan,
    ranking: &[Ranked],
    next: Option<&NextMeasurement>,
) -> io::Result<()> {
    let is_uncertain = |row: &Ranked| row.variance > 0.0 || row.probability < 1.0;
    if !plan.brief.ranking.uses_intervals() || !ranking.iter().any(is_uncertain) {
        return Ok(());
    }
    let of_first = (1_u64..)
        .zip(ranking)
        .filter(|(_, row)| row.band == Some(1))
        .map(|(rank, _)| rank);
    let of_first: Vec<u64> = of_first.collect();
    writeln!(out)?;
    if of_first.len() > 1 {
        writeln!(
            out,
            "{} are not distinguishable: each of the others has a chance above {} to score better than the first.",
            ranks_in_words(of_first),
            probability_in_words(BAND_CHANCE)
        )?;
    } else {
        writeln!(
            out,
            "The first is told apart from the others: none has a chance above {} to score better.",
            probability_in_words(BAND_CHANCE)
        )?;
    }
    if let Some(next) = next {
        writeln!(out, "To measure next: {}.", next.reason)?;
    }
    Ok(())
}

/// What a line can fall at, with what is wanted: lines are counted by name, so
/// two musts on one figure are told together.
pub(super) fn musts(plan: &Plan) -> Vec<(&str, String)> {
    let mut musts: Vec<(&str, String)> = Vec::new();
    for (name, wanted) in plan.musts() {
        match musts.iter_mut().find(|(known, _)| *known == name) {
            Some((_, all)) => {
                all.push_str("; ");
                all.push_str(wanted);
            }
            None => musts.push((name, wanted.to_owned())),
        }
    }
    musts
}

/// The top of the ranking: the figures that targets are set on, with units.
pub(super) fn ranking_text(plan: &Plan, rows: &[Ranked]) -> String {
    let mut shown: Vec<usize> = Vec::new();
    for target in &plan.targets {
        // The same figure by the other models stands beside it.
        for figure in std::iter::once(target.figure).chain(plan.other_models(target.figure)) {
            if !shown.contains(&figure) {
                shown.push(figure);
            }
        }
    }
    let columns = shown.iter().map(|&at| FigureColumn {
        name: plan.figures[at].name.clone(),
        dimension: plan.figures[at].dimension,
    });
    let table = RankedTable::new(columns.collect(), &[]);
    let figures: Vec<Vec<Option<f64>>> = rows
        .iter()
        .map(|row| shown.iter().map(|&at| row.figures[at]).collect())
        .collect();
    let places = ranks(rows);
    let rows = places.into_iter().zip(rows.iter().zip(&figures));
    table.text(
        rows.map(|(rank, (row, figures))| RankedRow {
            figures,
            ..row.as_row(rank, &[])
        }),
        output::width(),
    )
}

/// A line of the pool as the files of the run tell of it.
struct Told {
    line: u64,
    name: String,
    smiles: String,
    /// What became of it.
    outcome: String,
}

/// The line that goes by a name, else the first one of a molecule.
///
/// The files of the run are asked, not the pool: it may have been standard
/// input, and whether a line is a duplicate or kept is decided in them.
fn look_up(
    plan: &Plan,
    screened: &Screened,
    folder: &Path,
    wanted: &str,
    molecule: Option<&str>,
) -> Result<Option<Told>, CliError> {
    let mut profiler = crate::evaluate::Profiler::new();
    let mut found: Option<(bool, Told)> = None;
    let mut consider = |line: u64, name: &str, smiles: &str, outcome: &dyn Fn() -> String| {
        let by_name = !wanted.is_empty() && name.eq_ignore_ascii_case(wanted);
        let is_better = found
            .as_ref()
            .is_none_or(|(known, told)| (by_name, told.line) > (*known, line));
        let mut same = || {
            molecule.is_some_and(|key| {
                profiler
                    .profile(&plan.library, smiles)
                    .is_ok_and(|profile| profile.keys.full == key)
            })
        };
        if is_better && (by_name || same()) {
            let (name, smiles, outcome) = (name.to_owned(), smiles.to_owned(), outcome());
            let told = Told {
                line,
                name,
                smiles,
                outcome,
            };
            found = Some((by_name, told));
        }
    };
    for (rank, row) in screened.ranking.iter().enumerate() {
        let outcome = || {
            let mut outcome = format!("rank {} with score {:.4}", rank + 1, row.score);
            if !row.notes.is_empty() {
                outcome.push_str(&format!("\n  {}", row.notes));
            }
            outcome
        };
        consider(row.line, &row.name, &row.smiles, &outcome);
    }
    let path = folder.join(FILES[1]);
    let unreadable =
        |reason: String| CliError::File(FileError::new(&path, io::Error::other(reason)));
    let mut rows = csv::Reader::from_path(&path).map_err(|error| unreadable(error.to_string()))?;
    let mut row = csv::StringRecord::new();
    while rows
        .read_record(&mut row)
        .map_err(|error| unreadable(error.to_string()))?
    {
        let line = row[0]
            .parse()
            .map_err(|_| unreadable(format!("`{}` is no line", &row[0])))?;
        let outcome = || format!("{}: {}", &row[3], &row[7]);
        consider(line, &row[1], &row[2], &outcome);
    }
    Ok(found.map(|(_, told)| told))
}

/// Whether the pool is a file, not standard input or a pipe.
fn can_be_read_twice(plan: &Plan) -> bool {
    plan.brief.pool_path().is_some_and(|path| path.is_file())
}

/// Refuses to explain what nobody can find, before a long run is begun. Names
/// on standard input show only when they are read.
fn find_before_the_run(plan: &Plan, wanted: &str) -> Result<(), CliError> {
    let mut profiler = crate::evaluate::Profiler::new();
    let Err(unknown) = plan.library.find(&mut profiler, wanted) else {
        return Ok(());
    };
    if !can_be_read_twice(plan) {
        return Ok(());
    }
    let mut pool = open_pool(&plan.brief, None)?;
    let mut batch = Batch::default();
    loop {
        pool.read_batch(&mut batch, BATCH_LINES)?;
        if batch.is_empty() {
            return Err(CliError::Usage(format!(
                "--explain: no line of the pool is called so, and {unknown}"
            )));
        }
        let mut lines = (0..batch.len()).map(|at| batch.line(at));
        if lines.any(|line| line.name.eq_ignore_ascii_case(wanted)) {
            return Ok(());
        }
    }
}

/// The measured values that stand on a line of the pool; none where the pool
/// cannot be read a second time.
fn own_values(plan: &Plan, line: u64) -> Result<Vec<(Property, Estimate)>, CliError> {
    if !can_be_read_twice(plan) {
        return Ok(Vec::new());
    }
    let mut pool = open_pool(&plan.brief, None)?;
    if !pool.has_measured() {
        return Ok(Vec::new());
    }
    let mut batch = Batch::default();
    loop {
        pool.read_batch(&mut batch, BATCH_LINES)?;
        if batch.is_empty() {
            return Ok(Vec::new());
        }
        let mut lines = (0..batch.len()).map(|at| batch.line(at));
        if let Some(found) = lines.find(|found| found.line == line) {
            return Ok(found.measured().collect());
        }
    }
}

/// Tells all about one candidate, of the pool or not.
fn explain(
    out: &mut impl Write,
    plan: &Plan,
    screened: &Screened,
    folder: &Path,
    wanted: &str,
) -> Result<(), CliError> {
    let mut scratch = Scratch::new();
    let mut profiler = crate::evaluate::Profiler::new();
    let wanted = wanted.trim();
    let molecule = plan.library.find(&mut profiler, wanted).ok();
    let key = molecule
        .as_ref()
        .map(|(_, profile)| profile.keys.full.as_str());
    let told = look_up(plan, screened, folder, wanted, key)?;
    let smiles = match (&told, key) {
        (Some(told), _) => {
            let Told {
                line,
                name,
                smiles,
                outcome,
            } = told;
            writeln!(out, "{name}  {smiles}  (line {line})\n  {outcome}")?;
            smiles.as_str()
        }
        // Not of the pool: told all the same, as if it were.
        (None, Some(key)) => {
            writeln!(out, "{wanted}  {key}  (not in the pool)")?;
            key
        }
        (None, None) => {
            return Err(CliError::Usage(format!(
                "--explain: no candidate of the pool is called `{wanted}`, and it is no SMILES or known name"
            )));
        }
    };
    // Why a line is refused stands in the files already.
    let own = match &told {
        Some(told) => own_values(plan, told.line)?,
        None => Vec::new(),
    };
    let Ok(verdict) = plan.evaluate_with(&mut scratch, smiles, &own) else {
        return Ok(());
    };
    if told.is_none() {
        writeln!(out, "  {}", in_words(plan, &mut scratch, &verdict))?;
        let remarks = plan.remarks(&mut scratch);
        if !remarks.is_empty() {
            writeln!(out, "  {remarks}")?;
        }
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
    if let Verdict::Qualified {
        probability,
        score,
        variance,
        ..
    } = verdict
        && (probability < 1.0 || variance > 0.0)
    {
        let (low, high) = score_interval(score, variance);
        let (least, most) = plan.probability_bounds(&scratch);
        writeln!(
            out,
            "  score {low:.4} to {high:.4} (90 %); all musts met with a probability of {}\n  \
             ({} to {} however the errors of its figures hang together)",
            probability_in_words(probability),
            probability_in_words(least),
            probability_in_words(most)
        )?;
    }
    let mut table = TextTable::new([
        TextColumn::text("figure"),
        TextColumn::number("value", ""),
        TextColumn::text("unit"),
        TextColumn::text("90 % interval"),
        TextColumn::text("wanted"),
        TextColumn::text("verdict"),
        TextColumn::number("desirability", ""),
        TextColumn::text("method"),
        TextColumn::text("detail"),
    ]);
    for (position, figure) in plan.figures.iter().enumerate() {
        let target = plan.targets.iter().find(|target| target.figure == position);
        let (wanted, judged) = judged(plan, &scratch, position);
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
                let interval = interval_that_counts(&found).map_or(String::new(), |(low, high)| {
                    let [low, high] = [low, high].map(|end| reading_text(end, figure.dimension));
                    format!("{low} to {high}")
                });
                let mut detail = found.flags.to_string();
                if let Some(source) = &found.source {
                    if !detail.is_empty() {
                        detail.push_str("; ");
                    }
                    detail.push_str(source);
                }
                [
                    figure.name.clone(),
                    reading_text(found.value, figure.dimension),
                    reading_unit(figure.dimension)
                        .map_or("", |unit| unit.symbol)
                        .into(),
                    interval,
                    wanted,
                    judged,
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
                    String::new(),
                    wanted,
                    String::new(),
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

/// What is wanted of a figure of the last candidate, and whether it is kept, for
/// each target on it.
fn judged(plan: &Plan, scratch: &Scratch, figure: usize) -> (String, String) {
    let (mut wanted, mut judged) = (Vec::new(), Vec::new());
    for (at, target) in plan.targets.iter().enumerate() {
        if target.figure != figure {
            continue;
        }
        wanted.push(target.wanted.as_str());
        if let Some(probability) = plan.probability_of(scratch, at) {
            let word = Judgement::of(probability, plan.brief.ranking.confidence).text();
            judged.push(match probability {
                0.0 | 1.0 => word.to_owned(),
                _ => format!("{word} ({})", probability_in_words(probability)),
            });
        }
    }
    (wanted.join("; "), judged.join("; "))
}

/// What would become of a candidate that is not of the pool.
fn in_words(plan: &Plan, scratch: &mut Scratch, verdict: &Verdict) -> String {
    let label = |at: usize| {
        plan.labels()
            .nth(at)
            .expect("verdicts name labels of the plan")
    };
    match verdict {
        Verdict::Qualified { score, .. } => format!("would qualify with score {score:.4}"),
        Verdict::Missed {
            label: at,
            value,
            dimension,
            probability,
        } => {
            let (name, wanted) = label(*at);
            let missed = missed_in_words(name, *value, *dimension, wanted, *probability);
            format!("would not qualify: {missed}")
        }
        Verdict::NotAssessable { label: at, reason } => {
            let reason = scratch.explained(plan, reason);
            format!("not assessable: {}: {reason}", label(*at).0)
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::screen::uncertain_runs::{BRIEF, plan, screened, wide};

    #[test]
    fn people_are_told_how_sure_a_ranking_is() {
        let folder = tempfile::tempdir().unwrap();
        let plan = plan(BRIEF, Some(wide));
        let screened = screened(&plan, 2, folder.path());
        let mut out = Vec::new();
        how_sure(&mut out, &plan, &screened.ranking, screened.next.as_ref()).unwrap();
        insta::assert_snapshot!(String::from_utf8(out).unwrap().trim(), @r"
        1–19, 21 are not distinguishable: each of the others has a chance above 20 % to score better than the first.
        To measure next: the boiling point of ether 6 1, which makes up 84 % of the variance of its score; knowing it would put it before ether 7 1 with a probability of 36 %.
        ");
        // A boiling point of 360 K with an interval up to 378 K.
        let mut scratch = Scratch::new();
        plan.evaluate(&mut scratch, "CCCCCCC").unwrap();
        let told = judged(&plan, &scratch, plan.targets[0].figure);
        let wanted = "at least 370 K".to_owned();
        assert_eq!(
            told,
            (wanted, "within the method's error (17 %)".to_owned())
        );
    }
}
