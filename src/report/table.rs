//! Tables: the history of an improvement as CSV, reports as JSON, a summary for the terminal.

use super::error::ReportError;
use super::ticks::short;
use crate::study::{Aim, CautionLevel, ImproveReport, Improved, SolveReport, Solved, StepRecord};
use serde::Serialize;
use serde_json::Value;
use std::fmt::Write;

/// Significant digits on the terminal: more than the figures are good for, enough to compare two runs.
const DIGITS: usize = 5;

/// One line an iteration; the heads carry the units. Text is quoted, numbers have all their digits.
pub fn history_csv(aim: &Aim, history: &[StepRecord]) -> String {
    let (words, unit) = (aim.words(), aim.unit());
    let mut csv = String::new();
    let mut heads = vec![
        "step".to_owned(),
        "evaluations".into(),
        "accepted".into(),
        quoted(&format!("{words} ({unit})")),
        "violation (relative)".into(),
        "step_length (m)".into(),
        "trust_radius (m)".into(),
        "stationarity (relative)".into(),
        "heat (W/m)".into(),
        "total_pressure_drop (Pa)".into(),
        "flow_rate (m^2/s)".into(),
        "max_temperature (K)".into(),
    ];
    let limits = history
        .first()
        .map(|r| r.limits.as_slice())
        .unwrap_or_default();
    heads.extend(
        limits
            .iter()
            .map(|l| quoted(&format!("{} ({})", l.name, l.unit))),
    );
    heads.push("note".into());
    csv += &heads.join(",");
    csv.push('\n');
    for record in history {
        let report = record.report.as_deref();
        let figure =
            |pick: fn(&SolveReport) -> f64| report.map_or(String::new(), |r| number(pick(r)));
        let mut cells = vec![
            record.step.to_string(),
            record.evaluations.to_string(),
            u8::from(record.accepted).to_string(),
            number(record.aim_value),
            number(record.violation),
            number(record.step_length_m),
            number(record.trust_radius_m),
            number(record.stationarity),
            figure(|r| r.heat_w_m),
            figure(|r| r.total_pressure_drop_pa),
            figure(|r| r.flow_rate_m2_s),
            figure(|r| r.max_temperature_k),
        ];
        let values = record.limits.iter().map(|l| number(l.value));
        cells.extend(
            values
                .chain(std::iter::repeat(String::new()))
                .take(limits.len()),
        );
        cells.push(quoted(&record.note));
        csv += &cells.join(",");
        csv.push('\n');
    }
    csv
}

/// Empty where it is not finite.
fn number(value: f64) -> String {
    if value.is_finite() {
        format!("{value:e}")
    } else {
        String::new()
    }
}

/// A cell of text as RFC 4180 quotes it; line ends become blanks.
fn quoted(text: &str) -> String {
    let flat = text.replace(['\n', '\r'], " ");
    if flat.contains([',', '"']) {
        format!("\"{}\"", flat.replace('"', "\"\""))
    } else {
        flat
    }
}

/// A report as JSON text. No number in it is NaN or infinite.
///
/// # Errors
/// [`ReportError::NotFinite`] with the key.
pub fn json(report: &impl Serialize) -> Result<String, ReportError> {
    let text = serde_json::to_string_pretty(report)?;
    // serde_json writes what is not finite as null, and no report holds a null of its own.
    let value: Value = serde_json::from_str(&text)?;
    match first_null(&value, String::new()) {
        None => Ok(text + "\n"),
        Some(key) => Err(ReportError::NotFinite { key }),
    }
}

fn first_null(value: &Value, key: String) -> Option<String> {
    match value {
        Value::Null => Some(key),
        Value::Array(items) => {
            let mut items = items.iter().enumerate();
            items.find_map(|(i, v)| first_null(v, format!("{key}[{i}]")))
        }
        Value::Object(map) => map.iter().find_map(|(name, v)| {
            let dot = if key.is_empty() { "" } else { "." };
            first_null(v, format!("{key}{dot}{name}"))
        }),
        _ => None,
    }
}

/// The report of an improvement, from its result.
pub fn improve_report(improved: &Improved) -> ImproveReport {
    let aim = &improved.best.case.design.aim;
    let (words, unit) = (aim.words(), aim.unit());
    ImproveReport {
        start: improved.start.report.clone(),
        r#final: improved.best.report.clone(),
        aim: format!("{words}, {unit}"),
        aim_start: improved.start.aim_value,
        aim_final: improved.best.aim_value,
        limits: improved.best.limits.clone(),
        steps: improved.steps,
        evaluations: improved.evaluations,
        stop_reason: improved.stop_sentence.clone(),
        gradient_check: improved.gradient_check,
    }
}

/// One line of a summary.
fn line(text: &mut String, name: &str, value: f64, unit: &str) {
    // Writing to a String cannot fail.
    let _ = writeln!(text, "  {name:<28} {:>12} {unit}", short(value, DIGITS));
}

/// A solve for the terminal.
pub fn solve_summary(report: &SolveReport) -> String {
    let mut text = String::new();
    let r = report;
    line(&mut text, "flow rate", r.flow_rate_m2_s, "m^2/s");
    line(&mut text, "mean velocity", r.mean_velocity_m_s, "m/s");
    line(&mut text, "Reynolds number (2 H)", r.reynolds, "");
    line(
        &mut text,
        "static pressure drop",
        r.static_pressure_drop_pa,
        "Pa",
    );
    line(
        &mut text,
        "total pressure drop",
        r.total_pressure_drop_pa,
        "Pa",
    );
    line(&mut text, "pumping power", r.pumping_power_w_m, "W/m");
    line(&mut text, "heat from inserts", r.heat_w_m, "W/m");
    line(&mut text, "heat from walls", r.wall_heat_w_m, "W/m");
    line(
        &mut text,
        "outlet bulk temperature",
        r.outlet_bulk_temperature_k,
        "K",
    );
    line(&mut text, "highest temperature", r.max_temperature_k, "K");
    line(&mut text, "highest speed", r.max_speed_m_s, "m/s");
    for i in &r.inserts {
        let _ = writeln!(text, "insert \"{}\"", i.name);
        line(&mut text, "heat", i.heat_w_m, "W/m");
        line(&mut text, "drag", i.drag_n_m, "N/m");
        line(&mut text, "lift", i.lift_n_m, "N/m");
        line(&mut text, "highest temperature", i.max_temperature_k, "K");
        line(&mut text, "area", i.area_m2 * 1e6, "mm^2");
        line(&mut text, "perimeter", i.perimeter_m * 1e3, "mm");
        line(&mut text, "smallest gap", i.min_gap_m * 1e3, "mm");
        line(&mut text, "smallest radius", i.min_radius_m * 1e3, "mm");
        line(
            &mut text,
            "smallest thickness",
            i.min_thickness_m * 1e3,
            "mm",
        );
    }
    let _ = writeln!(
        text,
        "balances: mass {:.1e}, heat {:.1e}, energy {:.1e}, area {:.1e} (relative)",
        r.balance.mass_relative,
        r.balance.heat_relative,
        r.balance.energy_relative,
        r.balance.area_relative
    );
    let _ = writeln!(
        text,
        "{} triangles, {} unknowns, {} Newton steps, {:.2} s",
        r.triangles, r.unknowns, r.newton_steps, r.seconds.total
    );
    for caution in &r.cautions {
        let level = match caution.level {
            CautionLevel::Note => "note",
            CautionLevel::Caution => "caution",
            CautionLevel::Warning => "WARNING",
        };
        let _ = writeln!(text, "{level}: {}", caution.text);
    }
    text
}

/// An improvement for the terminal: the best state, what was gained, the limits.
pub fn improve_summary(start: &Solved, best: &Solved, stop_sentence: &str) -> String {
    let aim = &best.case.design.aim;
    let (words, unit) = (aim.words(), aim.unit());
    let mut text = solve_summary(&best.report);
    let gain = 100.0 * (best.aim_value / start.aim_value - 1.0);
    let _ = writeln!(
        text,
        "aim: {words}: {} to {} {unit} ({gain:+.2} %)",
        short(start.aim_value, DIGITS),
        short(best.aim_value, DIGITS)
    );
    for limit in &best.limits {
        let _ = writeln!(
            text,
            "limit: {}: {} against {} {}{}",
            limit.name,
            short(limit.value, DIGITS),
            short(limit.bound, DIGITS),
            limit.unit,
            if limit.active { " (active)" } else { "" }
        );
    }
    let _ = writeln!(text, "{stop_sentence}");
    text
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::base::Watch;
    use crate::study::Engine;
    use crate::study::stand_in::StandIn;
    use crate::study::test_design::project;

    fn improved() -> Improved {
        let mut engine = StandIn {
            steps: Some(3),
            ..StandIn::default()
        };
        engine
            .improve(&project().case(), &Watch::idle(), &mut |_| {})
            .expect("stands in")
    }

    #[test]
    fn the_history_has_a_line_an_iteration_and_units_in_its_heads() {
        let mut improved = improved();
        improved.history[1].note = "held, by \"area\"\n".into();
        improved.history[2].report = None;
        improved.history[2].stationarity = f64::NAN;
        let csv = history_csv(&project().design.aim, &improved.history);
        let lines: Vec<&str> = csv.lines().collect();
        assert_eq!(lines.len(), 5);
        assert!(lines[0].contains("most heat from the inserts (W/m)"));
        assert!(lines[0].contains("area of the inserts (m^2)"));
        let commas = |line: &str| line.matches(',').count();
        assert!(lines[2].ends_with("\"held, by \"\"area\"\" \""));
        assert_eq!(commas(lines[2]), commas(lines[0]) + 1);
        assert_eq!(commas(lines[3]), commas(lines[0]));
        assert!(!csv.contains("NaN"));
        // A number comes back to the last bit.
        let aim: f64 = lines[4]
            .split(',')
            .nth(3)
            .and_then(|c| c.parse().ok())
            .expect("a number");
        assert_eq!(aim, improved.history[3].aim_value);
    }

    #[test]
    fn json_has_the_agreed_keys_and_refuses_what_is_not_finite() {
        let mut report = improve_report(&improved());
        let text = json(&report).expect("finite");
        let value: Value = serde_json::from_str(&text).expect("JSON");
        for key in [
            "start",
            "final",
            "aim",
            "limits",
            "steps",
            "evaluations",
            "stop_reason",
            "gradient_check",
        ] {
            assert!(value.get(key).is_some(), "{key}");
        }
        report.r#final.inserts[0].lift_n_m = f64::NAN;
        let error = json(&report).expect_err("refused").to_string();
        assert!(error.contains("final.inserts[0].lift_n_m"), "{error}");
    }

    #[test]
    fn summaries_name_units() {
        let improved = improved();
        let text = improve_summary(&improved.start, &improved.best, &improved.stop_sentence);
        for part in [
            " W/m\n",
            " Pa\n",
            "insert \"tube\"",
            "WARNING: ",
            "aim: most heat",
            " %)",
        ] {
            assert!(text.contains(part), "{part} in\n{text}");
        }
    }
}
