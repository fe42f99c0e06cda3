//! The parameter file: keys as documented, round trips, the same content in both formats, and errors with their place.

mod report_sample;

use std::path::Path;

use ndarray::array;
use planish::fits::{Condition, Covariance, Fitted, FittedValue, Quantity, Verdict};
use planish::parameters::{
    InputHash, Parameter, ParameterFile, Provenance, RunFrames, Sheet, look_up, round_for_writing,
};
use planish::units::N_PER_M_PER_EV_PER_A2;

fn provenance() -> Provenance {
    Provenance {
        program: "planish 0.1.0".to_owned(),
        pipeline: "drumhead.toml".to_owned(),
        pipeline_blake3: "00ff".to_owned(),
        input: vec![InputHash {
            path: "../demo-trajectories/hbn-a-300K.xtc".to_owned(),
            blake3: "11ee".to_owned(),
        }],
        run: vec![RunFrames {
            sheet: "hbn-a".to_owned(),
            run: "300K".to_owned(),
            frames: 301,
            frames_used: 280,
        }],
    }
}

/// The documentation's example of one parameter.
fn example() -> Quantity {
    Quantity {
        name: "bending_rigidity",
        unit: "eV",
        condition: Condition {
            run: Some("300K".to_owned()),
            temperature: Some(300.0),
            tension: Some(0.0),
            length: Some(52.4),
        },
        value: Some(FittedValue {
            value: 1.45,
            error: 0.12,
            interval95: [1.23, 1.71],
        }),
        method: "height-spectrum".to_owned(),
        verdict: Verdict::Good,
        note: String::new(),
    }
}

fn absent() -> Quantity {
    Quantity {
        name: "shear_modulus",
        unit: "N/m",
        condition: Condition::default(),
        value: None,
        method: "cell-fluctuations".to_owned(),
        verdict: Verdict::Unusable,
        note: "the shear strain is clamped".to_owned(),
    }
}

fn file() -> ParameterFile {
    let per_run = Fitted {
        quantities: vec![example(), absent()],
        covariances: vec![Covariance {
            run: Some("300K".to_owned()),
            names: vec!["bending_rigidity".to_owned(), "lattice_term".to_owned()],
            matrix: array![[0.0144, 0.001], [0.001, 0.04]],
        }],
        ..Fitted::default()
    };
    let joint = Fitted {
        covariances: vec![Covariance {
            run: None,
            names: vec!["bending_rigidity_bare".to_owned()],
            matrix: array![[1.0e-3]],
        }],
        ..Fitted::default()
    };
    ParameterFile::new(provenance(), vec![Sheet::from_fits("hbn-a", &[per_run, joint])])
}

#[test]
fn the_file_is_as_documented() {
    insta::assert_snapshot!(file().to_toml());
}

#[test]
fn the_documented_example_is_reproduced_key_for_key() {
    let text = file().to_toml();
    let start = text.find("[[sheet.parameter]]\n").expect("a parameter");
    let record = text[start..].lines().take(13).collect::<Vec<_>>().join("\n");
    assert_eq!(
        record,
        r#"[[sheet.parameter]]
name = "bending_rigidity"
run = "300K"
temperature_K = 300.0
tension_N_per_m = 0.0
length_A = 52.4
value = 1.45
error = 0.12
interval95 = [1.23, 1.71]
unit = "eV"
method = "height-spectrum"
verdict = "good"
note = """#
    );
}

#[test]
fn toml_and_json_hold_the_same() {
    let from_toml: toml::Value = toml::from_str(&file().to_toml()).expect("TOML");
    let from_json: serde_json::Value = serde_json::from_str(&file().to_json()).expect("JSON");
    assert_eq!(
        serde_json::to_value(from_toml).expect("TOML values are JSON values"),
        from_json
    );
}

#[test]
fn what_is_written_reads_back() {
    let text = file().to_toml();
    let read = ParameterFile::from_toml(&text, Path::new("p.toml")).expect("a good file");
    assert_eq!(read, file().rounded());
    assert_eq!(read.to_toml(), text);
    // A whole sheet of the usual size, with numbers that do need rounding.
    let estimates = report_sample::sheet("hbn-a");
    let full = ParameterFile::new(
        provenance(),
        vec![Sheet::from_fits("hbn-a", &report_sample::fits(&estimates))],
    );
    let read = ParameterFile::from_toml(&full.to_toml(), Path::new("p.toml")).expect("a good file");
    assert_eq!(read, full.rounded());
    assert_eq!(read.sheet[0].parameter.len(), 25);
}

#[test]
fn several_covariances_become_one_block_diagonal_table() {
    let file = file();
    let covariance = file.sheet[0].covariance.as_ref().expect("a covariance");
    assert_eq!(
        covariance.names,
        [
            "bending_rigidity@300K",
            "lattice_term@300K",
            "bending_rigidity_bare"
        ]
    );
    assert_eq!(
        covariance.matrix,
        [
            vec![0.0144, 0.001, 0.0],
            vec![0.001, 0.04, 0.0],
            vec![0.0, 0.0, 1.0e-3]
        ]
    );
    assert_eq!(file.to_toml().matches("[sheet.covariance]").count(), 1);
}

#[test]
fn tension_is_written_in_newtons_per_metre() {
    let mut quantity = example();
    quantity.condition.tension = Some(0.003_120_754_5);
    let parameter = Parameter::from_quantity(&quantity);
    // 1 eV/A^2 is 16.0217663 N/m (CODATA 2018): 0.05 N/m is 0.0031207545 eV/A^2.
    let written = parameter.tension_N_per_m.expect("a tension");
    assert!((written - 0.05).abs() < 1e-9, "{written}");
    assert_eq!(written, 0.003_120_754_5 * N_PER_M_PER_EV_PER_A2);
}

#[test]
fn unusable_and_unbounded_numbers_are_never_written() {
    let mut unusable = example();
    unusable.verdict = Verdict::Unusable;
    let mut unbounded = example();
    unbounded.value = Some(FittedValue {
        value: 1.0,
        error: f64::INFINITY,
        interval95: [0.0, f64::INFINITY],
    });
    let mut without_number = example();
    without_number.value = None;
    for quantity in [unusable, unbounded, without_number] {
        let parameter = Parameter::from_quantity(&quantity);
        assert_eq!(
            (parameter.value, parameter.error, parameter.interval95),
            (None, None, None)
        );
        assert_eq!(parameter.verdict, Verdict::Unusable);
        assert_eq!(parameter.fault(), None);
    }
}

#[test]
fn last_bits_do_not_reach_the_file() {
    let with = |value: f64| {
        let mut quantity = example();
        quantity.value = Some(FittedValue::symmetric(value, 0.1));
        let fitted = Fitted {
            quantities: vec![quantity],
            ..Fitted::default()
        };
        ParameterFile::new(provenance(), vec![Sheet::from_fits("a", &[fitted])]).to_toml()
    };
    let value = 2.998_765_432_1;
    assert_eq!(with(value), with(value * (1.0 + 8.0 * f64::EPSILON)));
    assert_eq!(round_for_writing(value), 2.998_765_4);
}

#[test]
fn every_fitted_name_has_its_row_with_the_same_unit() {
    let estimates = report_sample::sheet("hbn-a");
    for quantity in report_sample::fits(&estimates)
        .iter()
        .flat_map(|fitted| &fitted.quantities)
    {
        let row = look_up(quantity.name).expect("a known name");
        assert_eq!(row.unit, quantity.unit);
    }
}

fn error_of(text: &str) -> String {
    ParameterFile::from_toml(text, Path::new("limits.toml"))
        .expect_err("a bad file")
        .to_string()
}

#[test]
fn errors_name_the_place_and_the_remedy() {
    let good = file().to_toml();
    let line_of = |needle: &str| good[..good.find(needle).expect("there")].matches('\n').count() + 1;

    let message = error_of(&good.replace("value = 1.45\n", "value = \"1.45\"\n"));
    assert!(
        message.starts_with(&format!("limits.toml, line {}", line_of("value = 1.45"))),
        "{message}"
    );

    let message = error_of(&good.replace("planish.parameters/1", "planish.parameters/9"));
    assert!(message.starts_with("limits.toml, line 1, column"), "{message}");
    assert!(message.contains("planish.parameters/1"), "{message}");

    let message = error_of(&good.replace("error = 0.12\n", ""));
    assert!(
        message.starts_with(&format!("limits.toml, line {}", line_of("[[sheet.parameter]]"))),
        "{message}"
    );
    assert!(message.contains("bending_rigidity of sheet hbn-a"), "{message}");

    let message = error_of(&good.replace("[1.23, 1.71]", "[1.71, 1.23]"));
    assert!(message.contains("lower end first"), "{message}");

    let message = error_of(&good.replace("verdict = \"good\"", "verdict = \"fine\""));
    assert!(message.contains("fine") && message.contains("weak"), "{message}");

    let message = error_of(&good.replace("[0.0144, 0.001, 0.0]", "[0.0144, 0.002, 0.0]"));
    assert!(message.contains("symmetric"), "{message}");

    let missing = ParameterFile::read(Path::new("no/such.toml")).expect_err("no such file");
    assert!(missing.to_string().contains("no/such.toml"), "{missing}");
}
