//! What can be written on the command line.

use std::path::PathBuf;

use clap::{Args, Parser, Subcommand, ValueEnum};

use crate::report::RowForm;

/// Ranks solvent candidates for a mixture from published group methods and measured data.
#[derive(Debug, Parser)]
#[command(
    name = "groupsmith",
    version,
    max_term_width = 100,
    arg_required_else_help = true
)]
pub(super) struct Arguments {
    #[command(subcommand)]
    pub(super) command: Command,
    /// Print no progress, notes or warnings
    #[arg(long, global = true)]
    pub(super) quiet: bool,
    /// Compute with the parameter tables as they circulate, suspected slips included
    #[arg(long, global = true)]
    pub(super) as_circulated: bool,
    /// Folder of tables laid over the built-in ones (same folder and file names as groups/)
    #[arg(long, global = true, value_name = "DIR")]
    pub(super) tables: Option<PathBuf>,
    /// Folder of your own measured data: substances.csv, measured.csv, vapor_pressure.csv, …
    #[arg(long, global = true, value_name = "DIR")]
    pub(super) data: Option<PathBuf>,
    /// What estimates rest on where nothing is measured: structure, count or joback-reid
    #[arg(long, global = true, value_name = "LEVEL", default_value = "structure")]
    pub(super) estimates: String,
}

/// The commands.
#[derive(Debug, Subcommand)]
pub(super) enum Command {
    /// Break molecules down into the groups of the published sets
    Breakdown(Breakdown),
    /// Pure-component properties of molecules
    Properties(Properties),
    /// Activity and what follows from it for one stated mixture
    Mixture(Mixture),
    /// Rank a candidate list against a brief
    Screen(Screen),
    /// Search group assemblies against a brief
    Assemble(Assemble),
    /// Pages and pictures of a finished run (not built in yet)
    Report(Unbuilt),
    /// Merge the parts of one search
    Gather(Gather),
    /// Group sets, methods, models, figures, substances: what is built in and its source
    Tables(Tables),
    /// Is the brief sound, and how large is the job
    Check(Check),
}

/// How results are printed.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
pub(super) enum Format {
    /// Aligned text for people
    #[default]
    Text,
    /// Comma-separated values, one header line
    Csv,
    /// JSON
    Json,
}

impl Format {
    /// The form of streamed rows; `None` for text, which is laid out at the end.
    pub(super) fn rows(self) -> Option<RowForm> {
        match self {
            Self::Text => None,
            Self::Csv => Some(RowForm::Csv),
            Self::Json => Some(RowForm::Json),
        }
    }
}

/// Molecules of a look-up.
#[derive(Debug, Args)]
pub(super) struct Molecules {
    /// SMILES or names of built-in substances
    #[arg(value_name = "SMILES|NAME")]
    pub(super) molecules: Vec<String>,
    /// File of molecules: CSV with a `smiles`, `name` or `cas` column, or `SMILES name` lines; `-` is
    /// standard input
    #[arg(long, value_name = "FILE")]
    pub(super) from: Option<PathBuf>,
}

#[derive(Debug, Args)]
pub(super) struct Breakdown {
    #[command(flatten)]
    pub(super) molecules: Molecules,
    /// Group set: unifac, unifac-dortmund or joback; may repeat [default: all]
    #[arg(long = "set", value_name = "SET")]
    pub(super) sets: Vec<String>,
    #[arg(long, value_enum, default_value_t)]
    pub(super) format: Format,
}

#[derive(Debug, Args)]
pub(super) struct Properties {
    #[command(flatten)]
    pub(super) molecules: Molecules,
    /// Temperature of what depends on it, such as "25 degC"
    #[arg(
        long,
        value_name = "QUANTITY",
        default_value = "298.15 K",
        allow_hyphen_values = true
    )]
    pub(super) temperature: String,
    /// Leave measured substance data out
    #[arg(long)]
    pub(super) estimates_only: bool,
    /// Compare estimates with measured values for the relatives of each molecule
    #[arg(long, conflicts_with = "estimates_only")]
    pub(super) family: bool,
    #[arg(long, value_enum, default_value_t)]
    pub(super) format: Format,
}

#[derive(Debug, Args)]
pub(super) struct Mixture {
    /// Brief whose [mixture] is computed; options below go before it
    pub(super) file: Option<PathBuf>,
    /// Component as SMILES or name; once for each
    #[arg(long = "component", value_name = "SMILES|NAME")]
    pub(super) components: Vec<String>,
    /// Fractions in component order, such as 0.4,0.6
    #[arg(long, value_name = "X,X")]
    pub(super) fractions: Option<String>,
    /// What the fractions count: mole, mass or volume
    #[arg(long)]
    pub(super) basis: Option<String>,
    /// Temperature, such as "25 degC"
    #[arg(long, value_name = "QUANTITY", allow_hyphen_values = true)]
    pub(super) temperature: Option<String>,
    /// Pressure, such as "1 atm"
    #[arg(long, value_name = "QUANTITY", allow_hyphen_values = true)]
    pub(super) pressure: Option<String>,
    /// Activity model; may repeat [default: unifac-dortmund]
    #[arg(long = "model", value_name = "MODEL")]
    pub(super) models: Vec<String>,
    /// Leave measured data of substances and pairs out
    #[arg(long)]
    pub(super) estimates_only: bool,
    #[arg(long, value_enum, default_value_t)]
    pub(super) format: Format,
}

#[derive(Debug, Args)]
pub(super) struct Screen {
    /// The brief
    pub(super) brief: PathBuf,
    /// Folder of the results [default: results/<folder of the brief>]
    #[arg(long, value_name = "DIR")]
    pub(super) out: Option<PathBuf>,
    /// Worker threads [default: one for each core]
    #[arg(long, value_name = "N")]
    pub(super) threads: Option<usize>,
    /// Leave measured data of candidates out (the mixture's own components keep theirs)
    #[arg(long)]
    pub(super) estimates_only: bool,
    /// Tell all about one candidate, by its name or SMILES, ranked or not
    #[arg(long, value_name = "NAME")]
    pub(super) explain: Option<String>,
    /// How many of the ranking are printed
    #[arg(long, value_name = "N", default_value_t = 20)]
    pub(super) show: usize,
}

#[derive(Debug, Args)]
pub(super) struct Assemble {
    /// The brief
    pub(super) brief: PathBuf,
    /// Folder of the results [default: results/<folder of the brief>]
    #[arg(long, value_name = "DIR")]
    pub(super) out: Option<PathBuf>,
    /// Worker threads [default: one for each core]
    #[arg(long, value_name = "N")]
    pub(super) threads: Option<usize>,
    /// Search one part of several only, such as 2/8
    #[arg(long, value_name = "K/N")]
    pub(super) part: Option<String>,
    /// Go on from the state that an earlier run left in the folder
    #[arg(long)]
    pub(super) resume: bool,
    /// Seconds between two states on disk, which a crash can cost at most
    #[arg(long, value_name = "SECONDS")]
    pub(super) state_every: Option<u64>,
    /// Tell what kept one molecule out, by its name or SMILES
    #[arg(long, value_name = "NAME")]
    pub(super) explain: Option<String>,
    /// How many of the ranking are printed
    #[arg(long, value_name = "N", default_value_t = 20)]
    pub(super) show: usize,
}

#[derive(Debug, Args)]
pub(super) struct Gather {
    /// Folders of the parts
    #[arg(value_name = "DIR", required = true)]
    pub(super) parts: Vec<PathBuf>,
    /// Folder of the results
    #[arg(long, value_name = "DIR")]
    pub(super) out: PathBuf,
    /// The brief, where it is not where the parts found it
    #[arg(long, value_name = "FILE")]
    pub(super) brief: Option<PathBuf>,
    /// How many of the ranking are printed
    #[arg(long, value_name = "N", default_value_t = 20)]
    pub(super) show: usize,
}

#[derive(Debug, Args)]
pub(super) struct Unbuilt {
    /// Anything
    #[arg(trailing_var_arg = true, allow_hyphen_values = true, hide = true)]
    pub(super) rest: Vec<String>,
}

#[derive(Debug, Args)]
pub(super) struct Tables {
    #[command(subcommand)]
    pub(super) what: Option<TablesWhat>,
}

/// What is to be listed.
#[derive(Debug, Subcommand)]
pub(super) enum TablesWhat {
    /// The groups of a set, or one group in full
    Groups {
        /// unifac, unifac-dortmund or joback
        set: String,
        /// Published number of one group
        number: Option<u16>,
    },
    /// One pair of main groups in full
    Pair {
        /// A UNIFAC model
        model: String,
        /// Published number of one main group
        first: u16,
        /// Published number of the other
        second: u16,
    },
    /// Main groups of a UNIFAC model and which pairs are published
    Coverage {
        /// A UNIFAC model
        model: String,
    },
    /// Methods for pure-component properties, or the errors of the fitted ones for one property
    Methods {
        /// A property as in briefs
        property: Option<String>,
    },
    /// Figures that targets can be set on
    Figures,
    /// Built-in substances, or one in full
    Substances {
        /// Name, synonym, CAS number or SMILES of one
        name: Option<String>,
    },
    /// Measured data of pairs from --tables: all, of one substance, or of two in full
    Pairs {
        /// Name, synonym, CAS number or SMILES of one
        first: Option<String>,
        /// The same of the other
        second: Option<String>,
    },
    /// Pieces of the assembly search, their ends and classes
    Pieces,
    /// The pattern language
    Patterns,
    /// Suspected slips of circulated tables and what is used instead
    Slips,
    /// Rules on the stability and hazards of structures, and reactions between components
    Rules,
}

#[derive(Debug, Args)]
pub(super) struct Check {
    /// The brief; may be left out where --data names a folder to check
    pub(super) brief: Option<PathBuf>,
}
