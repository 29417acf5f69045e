//! What the report says in sentences: the verdict, the uncertainty statement and the cautions.

use super::numbers;
use super::range;
use crate::calibrate::outcome::{Calibration, Finding};

/// Reynolds number above which laminar flow is not a matter of course.
const LAMINAR: f64 = 1800.0;

/// The verdict on a run.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Verdict {
    /// `accepted`, `refused` or `overridden`; names the mark and the style.
    pub kind: &'static str,
    /// The verdict in a word or three.
    pub headline: &'static str,
    /// The sentence that follows it.
    pub sentence: String,
}

/// The verdict, with the first reason for refusing or the reason given for using a refused run.
pub fn verdict(calibration: &Calibration) -> Verdict {
    let refusal = calibration.findings.iter().find(|finding| finding.refuses).map(|finding| finding.message.as_str());
    if let Some(reason) = &calibration.accepted_anyway {
        let sentence = if reason.trim().is_empty() { "no reason was given." } else { reason.trim() };
        return Verdict { kind: "overridden", headline: "Used although refused", sentence: sentence.to_string() };
    }
    if !calibration.accepted {
        let sentence = refusal.unwrap_or("the run did not pass; no finding was recorded.").to_string();
        return Verdict { kind: "refused", headline: "Refused", sentence };
    }
    let sentence = match calibration.findings.len() {
        0 => "the points agree with the characteristic within their uncertainties.".to_string(),
        1 => "the run may be used; one finding below is worth reading.".to_string(),
        n => format!("the run may be used; {n} findings below are worth reading."),
    };
    Verdict { kind: "accepted", headline: "Accepted", sentence }
}

/// The reason the run was refused, to stand beside an override.
pub fn overruled(calibration: &Calibration) -> Option<&str> {
    calibration.accepted_anyway.as_ref()?;
    calibration.findings.iter().find(|finding| finding.refuses).map(|finding| finding.message.as_str())
}

/// Name of a kind of finding, for a person.
pub fn finding_name(finding: &Finding) -> String {
    capitalised(&finding.kind.replace('-', " "))
}

/// The points a finding is about, in words; empty when it is about the run as a whole.
pub fn finding_lines(finding: &Finding) -> String {
    let lines: Vec<String> = finding.points.iter().map(u64::to_string).collect();
    match lines.as_slice() {
        [] => String::new(),
        [one] => format!("line {one}"),
        many if many.len() > 12 => format!("lines {} and {} more", many[..10].join(", "), many.len() - 10),
        [first @ .., last] => format!("lines {} and {last}", first.join(", ")),
    }
}

/// The coverage factor of the expanded uncertainties, to follow the letter k; empty when none is known.
pub fn coverage(calibration: &Calibration) -> String {
    let factors = calibration.uncertainty.iter().map(|row| row.coverage_factor).filter(|k| k.is_finite());
    let (low, high) = super::characteristic::limits(factors);
    let (low, high) = (numbers::fixed(low, 2), numbers::fixed(high, 2));
    match (calibration.uncertainty.is_empty(), low == high) {
        (true, _) => String::new(),
        (_, true) => format!("=\u{a0}{low}"),
        _ => format!("between {low} and {high}, from the effective degrees of freedom"),
    }
}

/// The state at which the uncertainties hold.
pub fn state(calibration: &Calibration) -> String {
    let at = &calibration.state;
    let (celsius, kilopascals) =
        (numbers::fixed(at.temperature - 273.15, 1), numbers::fixed(at.line_pressure / 1e3, 1));
    let humidity =
        at.relative_humidity.map(|rh| format!(" and a relative humidity of {}\u{a0}%", numbers::fixed(100.0 * rh, 0)));
    let pressure = format!("{celsius}\u{a0}°C, {kilopascals}\u{a0}kPa line pressure");
    format!("{pressure}{}", humidity.unwrap_or_default())
}

/// Where the scale of the type A uncertainty comes from.
pub fn basis(calibration: &Calibration) -> &'static str {
    match calibration.uncertainty_basis.as_str() {
        "stated" => "the uncertainties stated for the points",
        "residuals" => "the scatter of the points about the line",
        _ => "an unnamed source",
    }
}

/// What a reader should be careful about, from the data alone.
pub fn cautions(calibration: &Calibration) -> Vec<String> {
    let c = calibration;
    let mut found = Vec::new();
    if !c.accepted || c.accepted_anyway.is_some() {
        found.push("The run was refused; its numbers are shown so that the cause can be found.".to_string());
    }
    if c.b_from_prior {
        found.push("The kinetic coefficient b rests on the geometry of the element, not on these points.".to_string());
    }
    if c.uncertainty_basis == "residuals" {
        found.push(
            "The points came without uncertainties, so an error they share does not show in their scatter.".to_string(),
        );
    }
    if c.common.is_empty() {
        found.push(
            "No uncertainty shared by all points was stated; a reference flow without one is an assumption."
                .to_string(),
        );
    }
    if let Some(reynolds) = c.range.reynolds_max.filter(|re| *re > LAMINAR) {
        let reynolds = numbers::fixed(reynolds, 0);
        found.push(format!("The Reynolds number reached {reynolds}; above about 1800 flow need not stay laminar."));
    }
    if c.points > c.points_used {
        let left = c.points - c.points_used;
        found.push(format!("{left} of {} points did not enter the fit; they are shown, not hidden.", c.points));
    }
    found.extend(uneven(c));
    found
}

/// A word on an uncertainty that grows much towards low flow.
fn uneven(calibration: &Calibration) -> Option<String> {
    let (low, high) = (range::lowest(calibration)?.expanded, range::full_scale(calibration)?.expanded);
    let text = || {
        let (low, high) = (numbers::percent(low), numbers::percent(high));
        format!(
            "The uncertainty is not the same everywhere: {low}\u{a0}% at the lowest flow, {high}\u{a0}% at full scale."
        )
    };
    (low > 4.0 * high).then(text)
}

/// First letter in upper case.
pub fn capitalised(text: &str) -> String {
    let mut letters = text.chars();
    letters.next().map_or_else(String::new, |first| first.to_uppercase().chain(letters).collect())
}
