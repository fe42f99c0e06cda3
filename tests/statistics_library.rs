//! Autocorrelation times and effective samples against a general-purpose statistics library, on the series that
//! `tests/oracles/statistics_oracle.py` made (library and version stand in the JSON file beside it).

use planish::statistics::integrated_autocorrelation;
use serde::Deserialize;

#[derive(Deserialize)]
struct Oracle {
    library: String,
    cases: Vec<Case>,
}

#[derive(Deserialize)]
struct Case {
    coefficients: Vec<f64>,
    inefficiency: f64,
    effective_samples: f64,
    thousandths: Vec<i32>,
}

#[test]
fn autocorrelation_times_agree_with_the_library() {
    let oracle: Oracle = serde_json::from_str(include_str!("oracles/statistics_oracle.json")).unwrap();
    assert_eq!(oracle.cases.len(), 4);
    for case in oracle.cases {
        let series: Vec<f64> = case.thousandths.iter().map(|&x| f64::from(x) / 1000.0).collect();
        let found = integrated_autocorrelation(&[&series]).unwrap();
        let samples = found.effective_samples(series.len());
        let of = format!("{:?} by {}", case.coefficients, oracle.library);
        assert!(
            (found.inefficiency / case.inefficiency - 1.0).abs() < 0.10,
            "{found:?} {of}"
        );
        assert!(
            (samples / case.effective_samples - 1.0).abs() < 0.10,
            "{samples} {of}"
        );
    }
}
