//! The two tables of a run: who is ranked, and why the others are not.

use super::csv_line::{CsvLine, CsvRow};
use super::probability::probability_in_words;
use super::text_table::{TextColumn, TextTable};
use crate::quantity::Dimension;
use crate::quantity::number::RUN_DIGITS;
use crate::quantity::unit::{column_suffix, reading_text, reading_unit, to_table};
use crate::run;

/// A figure with a column of its own in the ranking.
#[derive(Clone, Debug, PartialEq)]
pub struct FigureColumn {
    /// Its name, made of letters, digits and underscores.
    pub name: String,
    /// What it measures; the unit of tables is added to the name of the column.
    pub dimension: Dimension,
}

impl FigureColumn {
    /// The name of the column, unit included: `boiling_point_k`.
    pub fn head(&self) -> String {
        format!("{}{}", self.name, column_suffix(self.dimension))
    }
}

/// How sure the place of a candidate is.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Uncertainty {
    /// Probability that every must is met.
    pub probability: f64,
    /// 90 % interval of the score; `None` where there is no score.
    pub score: Option<(f64, f64)>,
    /// Number of its band, from 1, where it has one.
    pub band: Option<u64>,
}

/// One ranked candidate.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct RankedRow<'a> {
    /// Its place, from 1.
    pub rank: u64,
    /// Name as given; may be empty.
    pub name: &'a str,
    /// SMILES.
    pub smiles: &'a str,
    /// Score from 0 to 1; `None` where a figure that counts is absent.
    pub score: Option<f64>,
    /// What intervals make of it; `None` where the bare numbers rank it.
    pub uncertainty: Option<Uncertainty>,
    /// The figures in SI, in column order.
    pub figures: &'a [Option<f64>],
    /// Their 90 % intervals in SI, where they have one.
    pub intervals: &'a [Option<(f64, f64)>],
    /// Line of the pool, from 1.
    pub line: u64,
    /// Flags, gaps and remarks, joined by `; `.
    pub notes: &'a str,
    /// Further columns of the pool, carried along.
    pub carried: &'a [&'a str],
}

impl RankedRow<'_> {
    /// Whether its score or a must of it is uncertain.
    fn is_uncertain(&self) -> bool {
        self.uncertainty.is_some_and(|sure| {
            sure.probability < 1.0 || sure.score.is_some_and(|(low, high)| low < high)
        })
    }
}

fn ends(interval: Option<(f64, f64)>) -> [Option<f64>; 2] {
    [interval.map(|(low, _)| low), interval.map(|(_, high)| high)]
}

/// Columns that follow what the pool carries along.
const UNCERTAINTY: [&str; 4] = ["probability", "score_low", "score_high", "band"];

/// The form of `ranked.csv`: fixed columns, figures, `line`, `notes`, what the
/// pool carries along, how sure the place is, and the ends of the intervals of
/// the figures that have some.
#[derive(Clone, Debug, PartialEq)]
pub struct RankedTable {
    figures: Vec<FigureColumn>,
    carried: Vec<String>,
    /// Positions of the figures whose intervals have columns.
    with_interval: Vec<usize>,
}

impl RankedTable {
    /// A table with these figures and carried columns. A carried column whose
    /// name is taken is shown as `pool_NAME`.
    pub fn new(figures: Vec<FigureColumn>, carried: &[&str]) -> Self {
        let mut taken: Vec<String> = ["rank", "name", "smiles", "score", "line", "notes"]
            .map(str::to_owned)
            .into();
        taken.extend(UNCERTAINTY.map(str::to_owned));
        for figure in &figures {
            let head = figure.head();
            taken.extend([format!("{head}_low"), format!("{head}_high"), head]);
        }
        let mut renamed = Vec::with_capacity(carried.len());
        for name in carried {
            let mut name = (*name).to_owned();
            while taken.contains(&name) {
                name.insert_str(0, "pool_");
            }
            taken.push(name.clone());
            renamed.push(name);
        }
        Self {
            figures,
            carried: renamed,
            with_interval: Vec::new(),
        }
    }

    /// The same table with the columns `NAME_low` and `NAME_high` for the figures
    /// that have intervals, by their position.
    #[must_use]
    pub fn with_intervals(mut self, has_interval: impl Fn(usize) -> bool) -> Self {
        self.with_interval = (0..self.figures.len())
            .filter(|&at| has_interval(at))
            .collect();
        self
    }

    /// Appends the line of column names.
    pub fn write_head(&self, out: &mut Vec<u8>) {
        let mut line = CsvLine::new(out);
        line.text("rank").text("name").text("smiles").text("score");
        for figure in &self.figures {
            line.text(&figure.head());
        }
        line.text("line").text("notes");
        for name in &self.carried {
            line.text(name);
        }
        for name in UNCERTAINTY {
            line.text(name);
        }
        for &at in &self.with_interval {
            let head = self.figures[at].head();
            line.text(&format!("{head}_low"))
                .text(&format!("{head}_high"));
        }
        line.end();
    }

    /// Appends the line of a candidate.
    ///
    /// # Panics
    ///
    /// If it has another number of figures, intervals or carried cells than the
    /// table.
    pub fn write_row(&self, row: &RankedRow<'_>, out: &mut Vec<u8>) {
        assert_eq!(row.figures.len(), self.figures.len());
        assert_eq!(row.intervals.len(), self.figures.len());
        assert_eq!(row.carried.len(), self.carried.len());
        let mut line = CsvLine::new(out);
        line.integer(row.rank)
            .text(row.name)
            .text(row.smiles)
            .number_or_empty(row.score, RUN_DIGITS);
        for (figure, value) in self.figures.iter().zip(row.figures) {
            let shown = value.map(|value| to_table(value, figure.dimension));
            line.number_or_empty(shown, RUN_DIGITS);
        }
        line.integer(row.line).text(row.notes);
        for cell in row.carried {
            line.text(cell);
        }
        let probability = row.uncertainty.map(|sure| sure.probability);
        let score = row.uncertainty.and_then(|sure| sure.score);
        line.number_or_empty(probability, RUN_DIGITS)
            .number_or_empty(score.map(|(low, _)| low), RUN_DIGITS)
            .number_or_empty(score.map(|(_, high)| high), RUN_DIGITS);
        match row.uncertainty.and_then(|sure| sure.band) {
            Some(band) => line.integer(band),
            None => line.empty(),
        };
        for &at in &self.with_interval {
            let dimension = self.figures[at].dimension;
            let [low, high] =
                ends(row.intervals[at]).map(|end| end.map(|end| to_table(end, dimension)));
            line.number_or_empty(low, RUN_DIGITS)
                .number_or_empty(high, RUN_DIGITS);
        }
        line.end();
    }

    /// The ranking for people: rank, name, score, how sure they are where some
    /// score or must is uncertain, figures in the units people read, and notes.
    pub fn text<'a>(
        &self,
        rows: impl IntoIterator<Item = RankedRow<'a>>,
        width: Option<usize>,
    ) -> String {
        let rows: Vec<RankedRow<'a>> = rows.into_iter().collect();
        let is_uncertain = rows.iter().any(RankedRow::is_uncertain);
        let mut columns = vec![
            TextColumn::number("rank", ""),
            TextColumn::text("name"),
            TextColumn::number("score", ""),
        ];
        if is_uncertain {
            columns.extend([
                TextColumn::number("90 % interval", ""),
                TextColumn::number("musts met", ""),
                TextColumn::number("band", ""),
            ]);
        }
        columns.extend(self.figures.iter().map(|figure| {
            let unit = reading_unit(figure.dimension).map_or("", |unit| unit.symbol);
            TextColumn::number(figure.name.replace('_', " "), unit)
        }));
        columns.push(TextColumn::text("remarks"));
        let mut table = TextTable::new(columns);
        for row in rows {
            let name = match row.name {
                "" => row.smiles,
                name => name,
            };
            let mut cells = vec![
                row.rank.to_string(),
                name.to_owned(),
                row.score.map_or("–".into(), |score| format!("{score:.4}")),
            ];
            if is_uncertain {
                let sure = row.uncertainty;
                let or_none = |text: Option<String>| text.unwrap_or_else(|| "–".into());
                cells.extend([
                    or_none(
                        sure.and_then(|sure| sure.score)
                            .map(|(low, high)| format!("{low:.3} to {high:.3}")),
                    ),
                    or_none(sure.map(|sure| probability_in_words(sure.probability))),
                    or_none(sure.and_then(|sure| sure.band).map(|band| band.to_string())),
                ]);
            }
            for (figure, value) in self.figures.iter().zip(row.figures) {
                cells.push(match value {
                    None => "–".into(),
                    Some(value) => reading_text(*value, figure.dimension),
                });
            }
            cells.push(row.notes.to_owned());
            table.add(cells);
        }
        table.render(width)
    }
}

/// One line of a pool that is not ranked.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct NotRankedRow<'a> {
    /// Line of the pool, from 1.
    pub line: u64,
    /// Name as given; may be empty.
    pub name: &'a str,
    /// SMILES, or the text of a line that could not be read.
    pub smiles: &'a str,
    /// How it came out.
    pub outcome: run::Outcome,
    /// The figure or structural limit it fell at; empty where there is none.
    pub figure: &'a str,
    /// The value in SI, and what it measures.
    pub value: Option<(f64, Dimension)>,
    /// What was wanted, in words.
    pub wanted: &'a str,
    /// Why, in words.
    pub reason: &'a str,
}

impl CsvRow for NotRankedRow<'_> {
    const HEAD: &'static str = "line,name,smiles,outcome,figure,value,wanted,reason";

    fn write_csv(&self, out: &mut Vec<u8>) {
        let mut line = CsvLine::new(out);
        let shown = self
            .value
            .map(|(value, dimension)| to_table(value, dimension));
        line.integer(self.line)
            .text(self.name)
            .text(self.smiles)
            .text(self.outcome.id())
            .text(self.figure)
            .number_or_empty(shown, RUN_DIGITS)
            .text(self.wanted)
            .text(self.reason);
        line.end();
    }
}
