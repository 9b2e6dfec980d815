//! The assembly search: molecules nobody put on the list.
//!
//! Joins pieces (`groups/pieces/`), bounds and scores assemblies of them by what
//! counts alone can tell, draws the structures of the best and hands them to the
//! same evaluation as a pool. Does not know `screen`. An *assembly* is a multiset
//! of pieces; its breakdown into groups is settled by its pieces.

mod account;
mod alike;
mod best;
mod completions;
mod error;
mod explain;
mod fragment;
mod limits;
mod model;
mod piece;
mod realize;
mod run;
mod search;
mod space;
mod state;
mod structures;

pub use account::{Account, TooManyToCount};
pub use best::{Best, Scored, advance_key, score_key};
pub use error::{AssemblyFault, PieceError};
pub use explain::{assembly_of, what_keeps_out};
pub use fragment::{Fragment, FragmentError};
pub use limits::Limits;
pub use model::{CountRule, Job, JobError, count_rules};
pub use piece::{Drawing, EndKind, Kind, Kinds, Piece, Pieces, Role};
pub use realize::Realizer;
pub use run::{
    Assembled, Assembling, DEFAULT_STRUCTURES, FILES, STATE_INTERVAL, SearchError,
    StructureAccount, Trial, in_words, read_parts,
};
pub use search::{Found, Unit};
pub use space::{CLASS_LIMIT, Skeleton, Space};
pub use state::{Part, STATE_FILES, State, StateError};
pub use structures::{Drawer, Structures};
