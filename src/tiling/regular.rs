//! Which tiling {p,q}.

use thiserror::Error;

/// What can be wrong with a tiling or a patch of it.
#[derive(Debug, Error, Clone, PartialEq)]
#[non_exhaustive]
pub enum TilingError {
    /// Too few or too many sides of a tile.
    #[error("a tile cannot have {sides} sides; between 3 and {most} are taken")]
    Polygon {
        /// Sides asked for.
        sides: u64,
        /// Most sides taken.
        most: u32,
    },
    /// Too few or too many tiles at a vertex.
    #[error("{around} tiles cannot meet at a vertex; between 3 and {most} are taken")]
    Around {
        /// Tiles asked for.
        around: u64,
        /// Most tiles taken.
        most: u32,
    },
    /// No polygon is named.
    #[error("no polygon is named; name at least one number of sides")]
    NoPolygon,
    /// More tiles than the limit.
    #[error(
        "{tiling} with {rings} rings has more than {limit} tiles, the limit; ask for fewer rings"
    )]
    TooManyTiles {
        /// The tiling, as `{p,q}`.
        tiling: String,
        /// Rings asked for.
        rings: u32,
        /// The limit.
        limit: u64,
    },
    /// More sides than the limit.
    #[error(
        "the tiles of {tiling} with {rings} rings have more than {limit} sides, the limit; ask for fewer rings"
    )]
    TooManySides {
        /// The tiling, as `{p,q}`.
        tiling: String,
        /// Rings asked for.
        rings: u32,
        /// The limit.
        limit: u64,
    },
    /// A sphere is full before the last ring.
    #[error(
        "{tiling} closes into a sphere of {tiles} tiles after {possible} rings; {rings} rings were asked for"
    )]
    Closed {
        /// The tiling, as `{p,q}`.
        tiling: String,
        /// Tiles of the sphere.
        tiles: u32,
        /// Rings that the sphere takes.
        possible: u32,
        /// Rings asked for.
        rings: u32,
    },
    /// Polygons that cannot be laid round a vertex in this order of rings.
    #[error("{tiling}: the tiles of ring {ring} do not close up round a vertex")]
    Misfit {
        /// The tiling, with its polygons.
        tiling: String,
        /// The ring in which it showed.
        ring: u32,
    },
}

/// The curvature of the surface on which a tiling lies.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Curvature {
    /// (p−2)(q−2) > 4.
    Hyperbolic,
    /// (p−2)(q−2) = 4.
    Euclidean,
    /// (p−2)(q−2) < 4.
    Spherical,
}

impl Curvature {
    /// −1, 0 or 1.
    pub const fn sign(self) -> f64 {
        match self {
            Self::Hyperbolic => -1.0,
            Self::Euclidean => 0.0,
            Self::Spherical => 1.0,
        }
    }
    /// The word for it: `hyperbolic`, `euclidean` or `spherical`.
    pub const fn word(self) -> &'static str {
        match self {
            Self::Hyperbolic => "hyperbolic",
            Self::Euclidean => "euclidean",
            Self::Spherical => "spherical",
        }
    }
}

/// The regular tiling {p,q}: p sides a tile, q tiles at a vertex; both lie in 3..=[`Self::MOST`].
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct Tiling {
    polygon: u32,
    around: u32,
}

impl Tiling {
    /// Most sides of a tile, and most tiles at a vertex.
    pub const MOST: u32 = 10_000;

    /// The tiling {p,q}.
    ///
    /// # Errors
    /// [`TilingError::Polygon`], [`TilingError::Around`].
    pub fn new(polygon: u64, around: u64) -> Result<Self, TilingError> {
        let fits = |n: u64| (3..=u64::from(Self::MOST)).contains(&n);
        if !fits(polygon) {
            return Err(TilingError::Polygon { sides: polygon, most: Self::MOST });
        }
        if !fits(around) {
            return Err(TilingError::Around { around, most: Self::MOST });
        }
        Ok(Self { polygon: polygon as u32, around: around as u32 })
    }
    /// Sides of a tile, p.
    pub const fn polygon(self) -> u32 {
        self.polygon
    }
    /// Tiles at a vertex, q.
    pub const fn around(self) -> u32 {
        self.around
    }
    /// The curvature of its surface.
    pub const fn curvature(self) -> Curvature {
        let defect = (self.polygon as u64 - 2) * (self.around as u64 - 2);
        match defect {
            0..4 => Curvature::Spherical,
            4 => Curvature::Euclidean,
            _ => Curvature::Hyperbolic,
        }
    }
    /// Factor by which a hyperbolic patch grows with each ring by the vertex rule:
    /// λ + 1/λ = (p−2)(q−2) − 2, the larger root. 1 elsewhere.
    pub fn growth_rate(self) -> f64 {
        let trace = (f64::from(self.polygon) - 2.0) * (f64::from(self.around) - 2.0) - 2.0;
        if trace <= 2.0 { 1.0 } else { (trace + (trace * trace - 4.0).sqrt()) / 2.0 }
    }
    /// Tiles of the whole sphere, 4q/(4 − (p−2)(q−2)); nothing for infinite tilings.
    pub fn sphere(self) -> Option<u32> {
        let defect = (self.polygon - 2).checked_mul(self.around - 2)?;
        (defect < 4).then(|| 4 * self.around / (4 - defect))
    }
}

impl std::fmt::Display for Tiling {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{{{},{}}}", self.polygon, self.around)
    }
}
