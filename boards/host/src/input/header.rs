//! What a column's header says: the quantity, its unit, or the standard uncertainty of a quantity.
//!
//! A header is `<quantity>_<unit>`; `u_<quantity>_<unit>` is a standard uncertainty that varies independently from row to
//! row and `u_<quantity>_common_<unit>` one shared by all rows (`u_<quantity>_<unit>_common` is understood as well).

use crate::input::{
    nearest::{letters, nearest, same_letters},
    problem::shown,
    units::{Quantity, RELATIVE, Unit},
};

/// Spellings in common use, without case and punctuation, and the unit each stands for.
const ALIASES: &[(&str, &str)] = &[
    ("degc", "C"),
    ("celsius", "C"),
    ("degk", "K"),
    ("kelvin", "K"),
    ("degf", "F"),
    ("fahrenheit", "F"),
    ("percent", "pct"),
    ("lpm", "L_min"),
    ("sec", "s"),
    ("pascal", "Pa"),
    ("wc", "inH2O"),
    ("inwc", "inH2O"),
];

/// Meaning of a column.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum ColumnKind {
    /// Values of a quantity in a unit.
    Measured(Quantity, Unit),
    /// Standard uncertainties of a quantity.
    Uncertainty {
        /// The quantity they belong to.
        quantity: Quantity,
        /// How they are stated.
        unit: UncertaintyUnit,
        /// Whether all rows share the deviation.
        common: bool,
    },
    /// Names of fluids.
    Fluid,
    /// Anything else, carried through untouched.
    Unknown,
}

/// How a standard uncertainty is stated.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum UncertaintyUnit {
    /// In a unit of the quantity; a temperature's is an interval. For humidity `pct` are percentage points.
    Absolute(Unit),
    /// As a part of the value; of a temperature's value in kelvin.
    Relative(Unit),
}

/// Recognises a header.
///
/// * `header`: the cell of the header row
///
/// # Errors
/// A message where a known quantity has no unit or an unknown one, listing what is accepted.
///
/// ```
/// use evenbore_bench::input::header::{ColumnKind, recognise};
/// assert!(matches!(recognise("pressure_drop_kPa"), Ok(ColumnKind::Measured(_, unit)) if unit.name() == "kPa"));
/// assert_eq!(recognise("operator"), Ok(ColumnKind::Unknown));
/// assert!(recognise("temperature_degC").unwrap_err().ends_with("did you mean temperature_C?"));
/// ```
pub fn recognise(header: &str) -> Result<ColumnKind, String> {
    if header == "fluid" {
        return Ok(ColumnKind::Fluid);
    }
    match header.strip_prefix("u_") {
        Some(rest) => split(rest).map_or(Ok(ColumnKind::Unknown), |(quantity, tail)| uncertainty(quantity, tail)),
        None => split(header).map_or(Ok(ColumnKind::Unknown), |(quantity, tail)| measured(quantity, tail)),
    }
}

/// Whether a header that means nothing was probably meant to hold a quantity.
///
/// * `header`: the cell of the header row
/// * `quantity`: the quantity looked for
pub fn resembles(header: &str, quantity: Quantity) -> bool {
    letters(header).starts_with(&letters(quantity.name()))
}

/// Accepted units of a quantity, for messages.
///
/// * `units`: the accepted ones
pub fn listed(units: &[Unit]) -> String {
    units.iter().map(Unit::name).collect::<Vec<_>>().join(", ")
}

/// The accepted unit that was probably meant.
///
/// * `wrong`: the unit as found
/// * `units`: the accepted ones
pub fn meant(wrong: &str, units: &[Unit]) -> Option<&'static str> {
    let names: Vec<&'static str> = units.iter().map(Unit::name).collect();
    if let Some(name) = same_letters(wrong, &names).filter(|_| !letters(wrong).is_empty()) {
        return Some(name);
    }
    let plain = if wrong == "%" { "percent".to_owned() } else { letters(wrong) };
    let alias = ALIASES.iter().find(|(word, _)| *word == plain).map(|(_, name)| *name);
    alias.filter(|name| names.contains(name)).or_else(|| nearest(wrong, &names))
}

/// Splits a header into the longest quantity it starts with and what follows.
fn split(header: &str) -> Option<(Quantity, &str)> {
    let fits = |quantity: Quantity| {
        let tail = header.strip_prefix(quantity.name())?;
        (tail.is_empty() || tail.starts_with(['_', ' ', '(', '['])).then_some((quantity, tail))
    };
    Quantity::ALL.into_iter().filter_map(fits).max_by_key(|(quantity, _)| quantity.name().len())
}

/// Meaning of a quantity's column.
fn measured(quantity: Quantity, tail: &str) -> Result<ColumnKind, String> {
    match find(quantity.units(), tail) {
        Some(unit) => Ok(ColumnKind::Measured(quantity, unit)),
        None => Err(refusal(quantity.name(), quantity.name(), tail, quantity.units())),
    }
}

/// Meaning of an uncertainty's column.
fn uncertainty(quantity: Quantity, tail: &str) -> Result<ColumnKind, String> {
    let (tail, common) = take_common(tail);
    if let Some(unit) = find(quantity.units(), tail).map(UncertaintyUnit::Absolute) {
        return Ok(ColumnKind::Uncertainty { quantity, unit, common });
    }
    if let Some(unit) = find(RELATIVE, tail).map(UncertaintyUnit::Relative) {
        return Ok(ColumnKind::Uncertainty { quantity, unit, common });
    }
    let what = format!("u_{}{}", quantity.name(), if common { "_common" } else { "" });
    Err(refusal(&what, quantity.name(), tail, &accepted_for_uncertainty(quantity)))
}

/// Takes the word `common` off either end.
fn take_common(tail: &str) -> (&str, bool) {
    match tail.strip_prefix("_common").or_else(|| tail.strip_suffix("_common")) {
        Some(rest) => (rest, true),
        None => (tail, false),
    }
}

/// Units of a quantity and the relative ones, each once.
fn accepted_for_uncertainty(quantity: Quantity) -> Vec<Unit> {
    let own = quantity.units();
    let more = RELATIVE.iter().filter(|unit| own.iter().all(|known| known.name() != unit.name()));
    own.iter().chain(more).copied().collect()
}

/// The unit that follows an underscore.
fn find(units: &[Unit], tail: &str) -> Option<Unit> {
    let name = tail.strip_prefix('_')?;
    units.iter().copied().find(|unit| unit.name() == name)
}

/// Message for a header without a usable unit.
fn refusal(what: &str, quantity: &str, tail: &str, units: &[Unit]) -> String {
    let wrong = tail.trim_matches(['_', ' ', '(', ')', '[', ']']);
    let fault = if wrong.is_empty() {
        format!("the unit is missing after {what}")
    } else {
        format!("{} is not a unit of {quantity}", shown(wrong.as_bytes()))
    };
    let hint = meant(wrong, units).map_or_else(String::new, |name| format!("; did you mean {what}_{name}?"));
    format!("{fault}: accepted are {} (rename the column if it is something else){hint}", listed(units))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn both_spellings_of_a_common_part() {
        for header in ["u_reference_flow_common_pct", "u_reference_flow_pct_common"] {
            let kind = recognise(header);
            assert!(
                matches!(
                    kind,
                    Ok(ColumnKind::Uncertainty {
                        quantity: Quantity::ReferenceFlow,
                        unit: UncertaintyUnit::Relative(_),
                        common: true
                    })
                ),
                "{kind:?}"
            );
        }
    }

    #[test]
    fn longest_quantity_wins() {
        assert!(matches!(
            recognise("reference_mass_flow_g_min"),
            Ok(ColumnKind::Measured(Quantity::ReferenceMassFlow, _))
        ));
        assert_eq!(recognise("timestamp"), Ok(ColumnKind::Unknown));
        assert_eq!(recognise("u_volume_flow_rel"), Ok(ColumnKind::Unknown));
    }

    #[test]
    fn near_misses_are_named() {
        for (header, meant) in [
            ("reference_flow_l_min", "reference_flow_L_min?"),
            ("reference_flow_Lmin", "reference_flow_L_min?"),
            ("temperature (C)", "temperature_C?"),
            ("line_pressure_KPA", "line_pressure_kPa?"),
            ("u_pressure_drop_common_pa", "u_pressure_drop_common_Pa?"),
            ("relative_humidity_%", "relative_humidity_pct?"),
        ] {
            let message = recognise(header).unwrap_err();
            assert!(message.ends_with(meant), "{message}");
        }
        assert!(recognise("temperature").unwrap_err().contains("missing after temperature: accepted are C, K, F"));
    }
}
