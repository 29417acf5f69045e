//! How closely a computed value must meet a published one, in one place.

/// Row of the table: what it applies to, how many units of it, and why no fewer.
pub struct Tolerance {
    /// Key used by the rows.
    pub name: &'static str,
    /// Largest difference, in the unit of the row: the value itself, its last printed digit, or one.
    pub value: f64,
    /// Reason for the size.
    pub why: &'static str,
}

const fn tolerance(name: &'static str, value: f64, why: &'static str) -> Tolerance {
    Tolerance { name, value, why }
}

/// Every tolerance of the statistics tests.
#[rustfmt::skip]
pub const TOLERANCES: &[Tolerance] = &[
    tolerance("printed", 0.5, "half a unit of the last digit printed"),
    tolerance("Norris", 1e-13, "reached 1.3e-14; 15 digits are certified"),
    tolerance("one parameter", 3e-14, "reached 2e-15; 15 digits are certified"),
    tolerance("Longley", 3e-14, "reached 2.5e-15 with refined residuals"),
    tolerance("Longley deviations", 3e-12, "reached 2.7e-13; the factor R is not refined"),
    tolerance("Wampler1", 1e-14, "reached exactly: the data are integers and fit without residuals"),
    tolerance("Wampler2", 6e-13, "reached 6.3e-14: the decimals of the data are rounded to binary"),
];

/// Looks a tolerance up; a row that names none is a defect of the test.
pub fn find(name: &str) -> &'static Tolerance {
    TOLERANCES.iter().find(|tolerance| tolerance.name == name).unwrap_or_else(|| panic!("no tolerance called {name}"))
}
