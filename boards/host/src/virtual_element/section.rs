//! The channel's cross-section: what a round tube and a slot differ in.

/// Size of one channel across the flow.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Section {
    /// A round tube.
    RoundTube {
        /// Inner diameter, m.
        bore: f64,
    },
    /// A slot, its side walls neglected.
    ParallelPlates {
        /// Full gap, m.
        gap: f64,
        /// Width, m.
        width: f64,
    },
}

impl Section {
    /// Open area, m2.
    pub fn area(&self) -> f64 {
        match *self {
            Self::RoundTube { bore } => std::f64::consts::FRAC_PI_4 * bore * bore,
            Self::ParallelPlates { gap, width } => gap * width,
        }
    }

    /// Four times the area over the wetted perimeter, m.
    pub fn hydraulic_diameter(&self) -> f64 {
        4.0 / self.wall_per_area()
    }

    /// Wetted perimeter over area, 1/m: 2/R, or 1/h with h half the gap.
    pub fn wall_per_area(&self) -> f64 {
        match *self {
            Self::RoundTube { bore } => 4.0 / bore,
            Self::ParallelPlates { gap, .. } => 2.0 / gap,
        }
    }

    /// What turns d/ds, s the share of the area, into a flux per area: `4 s/R^2`, or `1/h^2`; 1/m2.
    pub fn spreading(&self, share: f64) -> f64 {
        match *self {
            Self::RoundTube { bore } => 16.0 * share / (bore * bore),
            Self::ParallelPlates { gap, .. } => 4.0 / (gap * gap),
        }
    }

    /// The same section with every length multiplied by `stretch`.
    pub fn stretched(&self, stretch: f64) -> Self {
        match *self {
            Self::RoundTube { bore } => Self::RoundTube { bore: bore * stretch },
            Self::ParallelPlates { gap, width } => Self::ParallelPlates { gap: gap * stretch, width: width * stretch },
        }
    }

    /// The same section with its bore or gap multiplied by `factor`.
    pub fn with_bore_factor(&self, factor: f64) -> Self {
        match *self {
            Self::RoundTube { bore } => Self::RoundTube { bore: bore * factor },
            Self::ParallelPlates { gap, width } => Self::ParallelPlates { gap: gap * factor, width },
        }
    }
}
