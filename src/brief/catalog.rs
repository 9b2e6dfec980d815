//! What the program can compute, as far as a brief has to know it.

use crate::quantity::Dimension;
use crate::quantity::unit::nearest;

/// Whether a figure takes something.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Need {
    /// Giving it is a fault.
    #[default]
    Refused,
    /// It may be given.
    Optional,
    /// It has to be given.
    Required,
}

/// What a figure needs of the brief before it can be computed.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Needs {
    /// A `[mixture]` with its components, and a model.
    pub mixture: bool,
    /// Two key components.
    pub keys: bool,
    /// Fractions of the components.
    pub fractions: bool,
    /// A temperature of the mixture; a temperature of the target serves too
    /// where [`at_temperature`](Self::at_temperature) allows one, and so does a
    /// pressure, from which the bubble temperature follows.
    pub state: bool,
    /// A pressure of the mixture.
    pub pressure: bool,
    /// `solvent_to_feed` of the mixture.
    pub solvent_to_feed: bool,
    /// `component` of the target: which component of the mixture is meant.
    pub component: Need,
    /// `temperature` of the target: the temperature the figure is taken at.
    pub at_temperature: Need,
}

/// A figure a target can be set on.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Figure {
    /// The name used in briefs and column heads.
    pub id: &'static str,
    /// What it measures; decides the units of its limits.
    pub dimension: Dimension,
    /// What has to be in the brief for it.
    pub needs: Needs,
}

/// An activity model.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Model {
    /// The name used in briefs and on the command line.
    pub id: &'static str,
    /// Whether it can compute; a reserved name cannot yet.
    pub built_in: bool,
}

/// Every figure and model there is, in display order.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct FigureCatalog<'a> {
    /// The figures.
    pub figures: &'a [Figure],
    /// The models, reserved names included.
    pub models: &'a [Model],
}

impl FigureCatalog<'_> {
    /// The figure of this name.
    pub fn figure(&self, id: &str) -> Option<&Figure> {
        self.figures.iter().find(|figure| figure.id == id)
    }

    /// The figure whose name is most like this one.
    pub fn nearest_figure(&self, id: &str) -> Option<&'static str> {
        nearest(id, self.figures.iter().map(|figure| figure.id))
    }

    /// The model of this name.
    pub fn model(&self, id: &str) -> Option<&Model> {
        self.models.iter().find(|model| model.id == id)
    }

    /// The models that can compute, in order.
    pub fn built_in_models(&self) -> impl Iterator<Item = &'static str> {
        self.models
            .iter()
            .filter(|model| model.built_in)
            .map(|model| model.id)
    }
}
