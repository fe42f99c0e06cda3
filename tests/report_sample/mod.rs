//! A made-up sheet for the tests of the report: six temperatures on a real cell, with scatter from a fixed formula. Its
//! numbers mean nothing beyond being of the usual size.
#![allow(dead_code, clippy::pedantic)] // Each test file uses a part of it.

use ndarray::Array2;
use planish::estimates::{
    AreaBlock, Cut, Estimate, ModeEstimate, RunEstimates, SheetEstimates, SpectrumEstimate, SpectrumRow,
    StrainEstimate, Tension,
};
use planish::fits::{AreaCurve, Condition, Covariance, Fitted, FittedValue, PlateCurve, Quantity, Verdict};
use planish::theory::PlaneCell;
use planish::units::BOLTZMANN_EV_PER_K;

pub const CELL: PlaneCell = PlaneCell {
    a: [52.4, 0.0],
    b: [0.0, 51.8],
};

fn estimate(value: f64, error: f64) -> Estimate {
    Estimate {
        value,
        error,
        effective_samples: 60.0,
        split_r_hat: Some(1.01),
    }
}

/// A smooth kappa(q) that grows towards long waves and falls towards short ones.
pub fn kappa(q: f64, temperature: f64) -> f64 {
    let ripples = 0.02 * (temperature / 300.0).sqrt() / q;
    (0.87 + ripples) * (1.0 - 0.25 * q * q).max(0.05)
}

/// Scatter between -1 and 1 that looks random.
fn scatter(k: usize) -> f64 {
    (k as f64 * 12.9898).sin()
}

pub fn run(name: &str, temperature: f64, tension: Tension) -> RunEstimates {
    let mut modes = Vec::new();
    for m1 in 0..16_i32 {
        for m2 in -16..16_i32 {
            if m1 == 0 && m2 <= 0 {
                continue;
            }
            let q = CELL.wave_vector([m1, m2]);
            let length = q[0].hypot(q[1]);
            if length < 1.7 {
                modes.push(([m1, m2], q, length));
            }
        }
    }
    modes.sort_by(|a, b| a.2.total_cmp(&b.2));
    let thermal = BOLTZMANN_EV_PER_K * temperature / CELL.area();
    let samples = |q: f64| 20.0 + 250.0 * q;
    let modes: Vec<ModeEstimate> = modes
        .into_iter()
        .map(|(integers, q, length)| ModeEstimate {
            integers,
            q,
            length,
            power: thermal / (kappa(length, temperature) * length.powi(4)),
            effective_samples: samples(length),
            relaxation_ps: Some(2.0 * (0.12 / length).powi(2)),
            zone_weight: 1.0,
            split_r_hat: None,
            block_correlation: 1.0,
            static_power: 0.0,
            static_removed: false,
        })
        .collect();
    let mut rows = Vec::new();
    let mut first = 0;
    while first < modes.len() {
        let mut last = first;
        while last < modes.len() && modes[last].length <= 1.01 * modes[first].length {
            last += 1;
        }
        let inside = &modes[first..last];
        let n = inside.len() as f64;
        let mean = |f: &dyn Fn(&ModeEstimate) -> f64| inside.iter().map(f).sum::<f64>() / n;
        let total: f64 = inside.iter().map(|mode| mode.effective_samples).sum();
        let relative = 1.0 / total.sqrt();
        let factor = 1.0 + 1.4 * relative * scatter(rows.len() + temperature as usize);
        rows.push(SpectrumRow {
            modes: first..last,
            length: mean(&|mode| mode.length),
            power: factor * mean(&|mode| mode.power),
            power_error: relative * mean(&|mode| mode.power),
            weighted_power: factor * mean(&|mode| mode.power * mode.length.powi(4)),
            weighted_power_error: relative * mean(&|mode| mode.power * mode.length.powi(4)),
            effective_samples: total,
            relaxation_ps: Some(mean(&|mode| mode.relaxation_ps.unwrap_or(0.0))),
        });
        first = last;
    }
    let area = area(temperature);
    RunEstimates {
        name: name.to_owned(),
        temperature,
        tension,
        atoms: 1008,
        mass: Some(12_510.0),
        frames: 280,
        cut: Cut {
            frames_read: 280,
            frames_cut: 0,
            blocks_cut: 0,
            block_frames: 16,
        },
        area: estimate(area * (1.0 + 1e-4 * scatter(temperature as usize)), 1.2e-4 * area),
        area_blocks: (0..3)
            .map(|block| AreaBlock {
                block,
                time_ps: Some(20.0 + 6.4 * (block as f64 + 0.5)),
                area: area + block as f64,
                error: (block < 2).then_some(0.5),
            })
            .collect(),
        spectrum: SpectrumEstimate {
            cell: CELL,
            block_powers: Array2::zeros((1, modes.len())),
            modes,
            rows,
            block_frames: vec![16],
        },
        strain: StrainEstimate {
            cell: CELL,
            covariance: [[1e-6, 3e-7, 0.0], [3e-7, 1e-6, 0.0], [0.0; 3]],
            effective_samples: [[40.0; 3]; 3],
            split_r_hat: [[None; 3]; 3],
            free: [true, true, false],
            coupled: false,
        },
        excess_area: Some(estimate(0.004, 0.0004)),
        reservations: vec![],
    }
}

fn area(temperature: f64) -> f64 {
    let t = temperature / 1000.0;
    1008.0 * 2.7017 * (1.0 + 0.004 * t * (t + 1e-9).ln())
}

pub fn sheet(name: &str) -> SheetEstimates {
    SheetEstimates {
        name: name.to_owned(),
        runs: [150.0, 300.0, 450.0, 600.0, 750.0, 900.0]
            .into_iter()
            .map(|t| run(&format!("{t}K"), t, Tension::Stated(0.0)))
            .collect(),
    }
}

pub fn quantity(
    name: &'static str,
    unit: &'static str,
    run: Option<&str>,
    temperature: Option<f64>,
    number: Option<(f64, f64)>,
) -> Quantity {
    Quantity {
        name,
        unit,
        condition: Condition {
            run: run.map(str::to_owned),
            temperature,
            tension: run.map(|_| 0.0),
            length: (name == "bending_rigidity").then_some(52.4),
        },
        value: number.map(|(value, error)| FittedValue::symmetric(value, error)),
        method: "height-spectrum".to_owned(),
        verdict: if number.is_some() {
            Verdict::Good
        } else {
            Verdict::Unusable
        },
        note: if number.is_some() {
            String::new()
        } else {
            "3 effective samples; run ten times longer".to_owned()
        },
    }
}

pub fn fits(sheet: &SheetEstimates) -> Vec<Fitted> {
    let mut plate = Fitted::default();
    let mut expansion = Fitted::default();
    for (at, run) in sheet.runs.iter().enumerate() {
        let t = run.temperature;
        let q: Vec<f64> = (0..80)
            .map(|k| 0.11 * 1.035_f64.powi(k))
            .take_while(|q| *q < 1.2)
            .collect();
        plate.plate_curves.push(PlateCurve {
            run: run.name.clone(),
            window: [0.1199, if at == 1 { 0.8 } else { 1.0 }],
            kappa: q.iter().map(|q| kappa(*q, t)).collect(),
            q,
        });
        plate.covariances.push(Covariance {
            run: Some(run.name.clone()),
            names: vec!["bending_rigidity".to_owned(), "lattice_term".to_owned()],
            matrix: Array2::from_shape_vec((2, 2), vec![0.0144, 0.001, 0.001, 0.04]).expect("four numbers"),
        });
        let name = Some(run.name.as_str());
        let number = (t != 450.0).then_some((kappa(0.12, t), 0.09));
        plate
            .quantities
            .push(quantity("bending_rigidity", "eV", name, Some(t), number));
        let area = run.area.value / 1008.0;
        plate.quantities.push(quantity(
            "area_per_atom",
            "A^2",
            name,
            Some(t),
            Some((area, 0.0003)),
        ));
        let young = Some((255.0 - 0.05 * t, 21.0));
        plate
            .quantities
            .push(quantity("youngs_modulus", "N/m", name, Some(t), young));
        let alpha = Some((-3.1e-6 + 1e-9 * t, 4.0e-7));
        expansion
            .quantities
            .push(quantity("thermal_expansion", "1/K", None, Some(t), alpha));
    }
    let bare = quantity("bending_rigidity_bare", "eV", None, None, Some((0.861, 0.021)));
    plate.quantities.push(bare);
    let temperature: Vec<f64> = (0..50).map(|k| 150.0 + 750.0 * f64::from(k) / 49.0).collect();
    expansion.area_curve = Some(AreaCurve {
        area_per_atom: temperature.iter().map(|t| area(*t) / 1008.0).collect(),
        temperature,
    });
    vec![plate, expansion]
}
