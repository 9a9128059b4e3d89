//! What a picture tells about a network besides its shape. Plain data: whoever found the
//! cut, the closure or the recoverable legs hands them in.

use super::{Ink, PictureError};
use crate::network::{Network, Region};
use crate::tensor::Label;

/// Who holds a tensor once both sides have absorbed what they can.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Share {
    /// Nobody asked.
    #[default]
    Untold,
    /// Absorbed from the region: hatched.
    Region,
    /// Absorbed from the complement: dotted.
    Rest,
    /// Left over between the two: plain.
    Core,
}

/// Who can recover a bulk leg.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Reach {
    /// The region can.
    Region,
    /// The complement can.
    Rest,
    /// Neither can.
    Nobody,
}

/// Marks on a network.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Marks {
    /// The boundary region, its sites dark on the rim.
    pub region: Option<Region>,
    /// The labels that the minimal cut crosses.
    pub cut: Vec<Label>,
    /// One share a tensor; empty where nobody asked.
    pub shares: Vec<Share>,
    /// Bulk legs and who can recover them.
    pub bulk: Vec<(Label, Reach)>,
}

impl Marks {
    /// # Errors
    /// [`PictureError::Marks`] where they belong to another network.
    pub(super) fn check(&self, network: &Network) -> Result<(), PictureError> {
        let wrong = |what, given, expected| Err(PictureError::Marks { what, given, expected });
        if let Some(r) = &self.region
            && r.flags().len() != network.boundary().len()
        {
            return wrong("boundary sites", r.flags().len(), network.boundary().len());
        }
        if !self.shares.is_empty() && self.shares.len() != network.tensors() {
            return wrong("shares of tensors", self.shares.len(), network.tensors());
        }
        let labels = network.labels();
        let past = |l: &Label| l.index() >= labels;
        if let Some(l) = self.cut.iter().chain(self.bulk.iter().map(|b| &b.0)).find(|l| past(l)) {
            return wrong("label", l.index() + 1, labels);
        }
        Ok(())
    }
    pub(super) fn share(&self, t: usize) -> Share {
        self.shares.get(t).copied().unwrap_or_default()
    }
    pub(super) fn in_region(&self, site: usize) -> bool {
        self.region.as_ref().is_some_and(|r| r.flags()[site])
    }
}

impl Share {
    pub(super) fn class(self) -> &'static str {
        match self {
            Self::Untold => "",
            Self::Region => " a",
            Self::Rest => " b",
            Self::Core => " core",
        }
    }
}

/// Which shapes get an element of their own, with a `data-` attribute, so that a script can
/// find and recolour them.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Address {
    /// None: the smallest file.
    #[default]
    None,
    /// Boundary sites: `.site[data-site]`.
    Sites,
    /// Sites, tensors' cells (`.cell[data-tensor]`) and bosses (`.boss[data-tensor]`), and
    /// the places where a cut can cross (`.gate[data-label]`; give it the class `cut`).
    All,
}

/// How a picture is made.
#[derive(Debug, Clone, PartialEq)]
pub struct Options {
    /// Width on paper in millimetres; one journal column is 85. The drawing itself is always
    /// 850 units wide, so text is legible at 85 mm and larger on wider paper.
    pub width_mm: f64,
    /// Colours.
    pub ink: Ink,
    /// Elements of their own.
    pub address: Address,
    /// Names of tensors beside them, where there is room.
    pub names: bool,
    /// Numbers of boundary sites.
    pub numbers: bool,
    /// The explanation of signs below the drawing.
    pub legend: bool,
    /// A line above the drawing.
    pub title: Option<String>,
    /// Prefix of the ids inside the drawing; give each drawing of one page its own.
    pub id: String,
}

impl Default for Options {
    fn default() -> Self {
        Self {
            width_mm: 85.0,
            ink: Ink::Light,
            address: Address::None,
            names: false,
            numbers: true,
            legend: true,
            title: None,
            id: "ln".into(),
        }
    }
}
