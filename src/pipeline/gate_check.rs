//! `[gate]`: whether the parameters meet the limits of the pipeline.

use super::gate::{ErrorLimit, GateLimit};
use crate::parameters::{Parameter, ParameterFile};

/// Every limit that is not met, each as a sentence; a limited parameter that the file does not hold misses its limit.
#[must_use]
pub fn gate_missed(limits: &[GateLimit], file: &ParameterFile) -> Vec<String> {
    let mut missed = Vec::new();
    for sheet in &file.sheet {
        for limit in limits {
            let mut found = sheet
                .parameter
                .iter()
                .filter(|p| p.name == limit.parameter)
                .peekable();
            if found.peek().is_none() {
                missed.push(format!(
                    "{}: {} is not among the results",
                    sheet.name, limit.parameter
                ));
            }
            for parameter in found {
                let place = match &parameter.run {
                    Some(run) => format!("{}/{run}: {}", sheet.name, parameter.name),
                    None => format!("{}: {}", sheet.name, parameter.name),
                };
                missed.extend(
                    faults(limit, parameter)
                        .into_iter()
                        .map(|fault| format!("{place} {fault}")),
                );
            }
        }
    }
    missed
}

fn faults(limit: &GateLimit, parameter: &Parameter) -> Vec<String> {
    let unit = &parameter.unit;
    let mut faults = Vec::new();
    if let Some(worst) = limit.verdict
        && parameter.verdict > worst
    {
        faults.push(
            format!(
                "is {:?}, worse than {worst:?} ({})",
                parameter.verdict, parameter.note
            )
            .to_lowercase(),
        );
    }
    let (Some(value), Some(error)) = (parameter.value, parameter.error) else {
        if limit.min.is_some() || limit.max.is_some() || limit.max_error.is_some() {
            faults.push(format!("has no value ({})", parameter.note));
        }
        return faults;
    };
    if let Some(min) = limit.min.filter(|&min| value < min) {
        faults.push(format!("is {value} {unit}, below {min} {unit}"));
    }
    if let Some(max) = limit.max.filter(|&max| value > max) {
        faults.push(format!("is {value} {unit}, above {max} {unit}"));
    }
    let allowed = limit.max_error.map(|limit| match limit {
        ErrorLimit::Absolute(error) => error,
        ErrorLimit::Relative(share) => share * value.abs(),
    });
    if let Some(allowed) = allowed.filter(|&allowed| error > allowed) {
        faults.push(format!("has an error of {error} {unit}, above {allowed} {unit}"));
    }
    faults
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::fits::Verdict;

    fn parameter(value: Option<f64>, error: f64, verdict: Verdict) -> Parameter {
        Parameter {
            name: "bending_rigidity".into(),
            run: Some("300K".into()),
            temperature_K: None,
            tension_N_per_m: None,
            length_A: None,
            value,
            error: value.map(|_| error),
            interval95: value.map(|v| [v - 2.0 * error, v + 2.0 * error]),
            unit: "eV".into(),
            method: String::new(),
            verdict,
            note: "few samples".into(),
        }
    }

    fn limit() -> GateLimit {
        GateLimit {
            parameter: "bending_rigidity".into(),
            min: Some(1.0),
            max: Some(2.0),
            max_error: Some(ErrorLimit::Relative(0.1)),
            verdict: Some(Verdict::Good),
        }
    }

    #[test]
    fn each_limit_is_held() {
        assert!(faults(&limit(), &parameter(Some(1.5), 0.1, Verdict::Good)).is_empty());
        assert_eq!(
            faults(&limit(), &parameter(Some(0.9), 0.05, Verdict::Good)),
            ["is 0.9 eV, below 1 eV"]
        );
        assert_eq!(
            faults(&limit(), &parameter(Some(2.5), 0.05, Verdict::Good)),
            ["is 2.5 eV, above 2 eV"]
        );
        assert_eq!(
            faults(&limit(), &parameter(Some(1.5), 0.2, Verdict::Good)).len(),
            1
        );
        assert_eq!(
            faults(&limit(), &parameter(Some(1.5), 0.1, Verdict::Weak)),
            ["is weak, worse than good (few samples)"]
        );
        assert_eq!(
            faults(&limit(), &parameter(None, 0.0, Verdict::Unusable)).len(),
            2
        );
    }
}
