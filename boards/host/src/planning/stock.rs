//! Sizes a workshop finds on the shelf. All series here are common practice, none is a standard.

/// Bores of straight capillary tubes, mm (common practice).
pub const BORES_MM: [f64; 17] =
    [0.1, 0.15, 0.2, 0.25, 0.3, 0.35, 0.4, 0.5, 0.6, 0.7, 0.8, 1.0, 1.2, 1.5, 2.0, 2.5, 3.0];

/// Gaps set by shims, mm (common practice).
pub const GAPS_MM: [f64; 11] = [0.05, 0.075, 0.1, 0.125, 0.15, 0.2, 0.25, 0.3, 0.4, 0.5, 0.75];

/// Widths of one slot, mm (common practice).
pub const SLOT_WIDTHS_MM: [f64; 6] = [10.0, 20.0, 30.0, 50.0, 80.0, 120.0];

/// Lengths that are looked at first, mm; the length is then trimmed to the flow (common practice).
pub const LENGTHS_MM: [f64; 11] = [25.0, 40.0, 50.0, 60.0, 80.0, 100.0, 120.0, 150.0, 200.0, 250.0, 300.0];

/// Shortest and longest channel that is proposed, mm (common practice).
pub const LENGTH_LIMITS_MM: [f64; 2] = [15.0, 400.0];

/// A length is cut to this, mm (common practice).
pub const LENGTH_STEP_MM: f64 = 0.1;

/// Linear thermal expansion of austenitic steel, 1/K (common practice).
pub const EXPANSION_PER_K: f64 = 16e-6;

/// Temperature at which sizes hold, C.
pub const REFERENCE_TEMPERATURE_C: f64 = 20.0;

/// Outer over inner diameter of a capillary (common practice).
pub const OUTER_OVER_BORE: f64 = 1.5;

/// Share of a round bundle that its tubes fill (common practice).
pub const BUNDLE_FILL: f64 = 0.75;

/// Thickness of the plate between two slots, mm (common practice).
pub const PLATE_MM: f64 = 0.5;

/// Gaps that a slot must be wide for its side walls not to count (the library's own condition).
pub const WIDTH_OVER_GAP: f64 = 100.0;
