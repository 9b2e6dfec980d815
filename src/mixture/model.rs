//! The registry of activity models.

use super::unifac::{TableFile, UnifacTexts};

/// An activity model that can be asked for by name.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum ActivityModel {
    /// Ideal mixture: ln γ = 0.
    Ideal,
    /// Original UNIFAC with its published revisions.
    Unifac,
    /// Modified UNIFAC (Dortmund), parameters as published through 2016.
    UnifacDortmund,
    /// Modified UNIFAC (Dortmund), parameters as published through 2006.
    UnifacDortmund2006,
}

/// Whether a model of the registry can be used.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ModelStatus {
    /// Ready.
    BuiltIn(ActivityModel),
    /// The name is reserved; the model is not built in yet.
    Reserved,
}

/// Names kept for models that are not built in yet, with what they will be.
pub const RESERVED_MODELS: [(&str, &str); 10] = [
    ("unifac-lyngby", "modified UNIFAC (Lyngby)"),
    (
        "unifac-lle",
        "UNIFAC with parameters for liquid-liquid equilibrium",
    ),
    ("unifac-2", "UNIFAC with a completed parameter matrix"),
    (
        "unifac-dortmund-2",
        "modified UNIFAC (Dortmund) with a completed parameter matrix",
    ),
    (
        "regular-solution",
        "regular solution with Flory-Huggins term",
    ),
    ("margules", "Margules equation"),
    ("van-laar", "van Laar equation"),
    ("wilson", "Wilson equation"),
    ("nrtl", "NRTL equation"),
    ("uniquac", "UNIQUAC equation"),
];

impl ActivityModel {
    /// Every built-in model, in display order.
    pub const ALL: [Self; 4] = [
        Self::Ideal,
        Self::Unifac,
        Self::UnifacDortmund,
        Self::UnifacDortmund2006,
    ];

    /// The name used in briefs, arguments, CSV and JSON.
    pub const fn id(self) -> &'static str {
        match self {
            Self::Ideal => "ideal",
            Self::Unifac => "unifac",
            Self::UnifacDortmund => "unifac-dortmund",
            Self::UnifacDortmund2006 => "unifac-dortmund-2006",
        }
    }

    /// One line for people.
    pub const fn title(self) -> &'static str {
        match self {
            Self::Ideal => "ideal mixture",
            Self::Unifac => "UNIFAC (1975, with its published revisions)",
            Self::UnifacDortmund => "modified UNIFAC (Dortmund), parameters through 2016",
            Self::UnifacDortmund2006 => "modified UNIFAC (Dortmund), parameters through 2006",
        }
    }

    /// The group set whose counts the model takes; `None` if it needs none.
    pub const fn group_set(self) -> Option<&'static str> {
        match self {
            Self::Ideal => None,
            Self::Unifac => Some("unifac"),
            Self::UnifacDortmund | Self::UnifacDortmund2006 => Some("unifac-dortmund"),
        }
    }

    /// The built-in or reserved model of this name; `None` if there is no such name.
    pub fn from_id(id: &str) -> Option<ModelStatus> {
        if let Some(model) = Self::ALL.into_iter().find(|model| model.id() == id) {
            return Some(ModelStatus::BuiltIn(model));
        }
        RESERVED_MODELS
            .iter()
            .any(|(name, _)| *name == id)
            .then_some(ModelStatus::Reserved)
    }

    /// The built-in table files of a group-contribution model.
    pub const fn texts(self) -> Option<UnifacTexts<'static>> {
        const ORIGINAL: UnifacTexts<'static> = UnifacTexts {
            main_groups: TableFile {
                name: "groups/unifac/main_groups.csv",
                text: include_str!("../../groups/unifac/main_groups.csv"),
            },
            subgroups: TableFile {
                name: "groups/unifac/subgroups.csv",
                text: include_str!("../../groups/unifac/subgroups.csv"),
            },
            interactions: TableFile {
                name: "groups/unifac/interactions.csv",
                text: include_str!("../../groups/unifac/interactions.csv"),
            },
            slips: Some(TableFile {
                name: "groups/unifac/slips.csv",
                text: include_str!("../../groups/unifac/slips.csv"),
            }),
        };
        const DORTMUND: UnifacTexts<'static> = UnifacTexts {
            main_groups: TableFile {
                name: "groups/unifac-dortmund/main_groups.csv",
                text: include_str!("../../groups/unifac-dortmund/main_groups.csv"),
            },
            subgroups: TableFile {
                name: "groups/unifac-dortmund/subgroups.csv",
                text: include_str!("../../groups/unifac-dortmund/subgroups.csv"),
            },
            interactions: TableFile {
                name: "groups/unifac-dortmund/interactions-2016.csv",
                text: include_str!("../../groups/unifac-dortmund/interactions-2016.csv"),
            },
            slips: Some(TableFile {
                name: "groups/unifac-dortmund/slips.csv",
                text: include_str!("../../groups/unifac-dortmund/slips.csv"),
            }),
        };
        match self {
            Self::Ideal => None,
            Self::Unifac => Some(ORIGINAL),
            Self::UnifacDortmund => Some(DORTMUND),
            Self::UnifacDortmund2006 => Some(UnifacTexts {
                interactions: TableFile {
                    name: "groups/unifac-dortmund/interactions-2006.csv",
                    text: include_str!("../../groups/unifac-dortmund/interactions-2006.csv"),
                },
                ..DORTMUND
            }),
        }
    }
}
