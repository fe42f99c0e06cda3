//! `truth.toml`: what is known of a set, as parameter records, and how it was made.

use serde::Serialize;

use super::long_chain::{LongChain, Measured, WaveRow};
use super::plate_box::PlateBox;
use super::plate_request::PlatePlan;
use super::{LatticeKind, MintError};
use crate::fits::Verdict;
use crate::parameters::{Parameter, ParameterFile, Provenance, Sheet, look_up, round_for_writing};
use crate::theory::{PlaneCell, plate};
use crate::units::N_PER_M_PER_EV_PER_A2;

/// Half a 95 % interval in standard errors of a normal distribution.
const NORMAL_95: f64 = 1.959_963_984_540_054;

/// One finished temperature.
pub(super) struct MintedRun {
    pub name: String,
    pub trajectory: String,
    pub plate: PlateBox,
    pub long: LongChain,
    /// Of the chain that the trajectory is drawn from.
    pub acceptance: f64,
}

/// `[mint]`: how the set was made. Lengths in A, wave numbers in 1/A.
#[derive(Serialize)]
#[allow(non_snake_case)] // The unit in a key is spelled as the unit is: K, N, A.
struct MintTable {
    law: &'static str,
    seed: u64,
    generator: &'static str,
    lattice: LatticeKind,
    lattice_constant_A: f64,
    atoms: usize,
    modes: usize,
    #[serde(skip_serializing_if = "Option::is_none")]
    cut_per_A: Option<f64>,
    cell: &'static str,
    frames: usize,
    trajectories_per_frame: usize,
    frame_interval_ps: f64,
    note: &'static str,
    flat_a_A: [f64; 2],
    flat_b_A: [f64; 2],
    run: Vec<RunTable>,
}

#[derive(Serialize)]
#[allow(non_snake_case)]
struct RunTable {
    name: String,
    trajectory: String,
    temperature_K: f64,
    thermal_wave_number_per_A: f64,
    box_a_A: [f64; 2],
    box_b_A: [f64; 2],
    acceptance: f64,
    long_chain_trajectories: usize,
    long_chain_acceptance: f64,
    wave: Vec<WaveTable>,
}

#[derive(Serialize)]
#[allow(non_snake_case)]
struct WaveTable {
    q_per_A: f64,
    modes: Vec<[i32; 2]>,
    kappa_eV: f64,
    kappa_error_eV: f64,
}

#[derive(Serialize)]
struct Tail {
    mint: MintTable,
}

/// The text of `truth.toml`.
pub(super) fn truth(plan: &PlatePlan, runs: &[MintedRun]) -> Result<String, MintError> {
    let request = &plan.request;
    let tail = Tail {
        mint: MintTable {
            law: "plate",
            seed: request.seed,
            generator: "xoshiro256++",
            lattice: request.lattice,
            lattice_constant_A: request.lattice_constant,
            atoms: plan.lattice.atoms(),
            modes: plan.modes.len(),
            cut_per_A: request.cut,
            cell: if request.fixed_cell { "fixed" } else { "free" },
            frames: request.frames,
            trajectories_per_frame: request.spacing,
            frame_interval_ps: request.frame_interval,
            note: "equilibrium samples: times order them and say nothing of dynamics; waves at the zone's edge, and at or \
                   beyond the cut, do not move; q and -q are one mode",
            flat_a_A: plan.lattice.cell().a.map(round_for_writing),
            flat_b_A: plan.lattice.cell().b.map(round_for_writing),
            run: runs.iter().map(run_table).collect(),
        },
    };
    let tail = toml::to_string(&tail)
        .map_err(|error| MintError::request(format!("the truth has no TOML form: {error}")))?;
    let mut parameter = stated(plan);
    parameter.extend(runs.iter().flat_map(|run| of_run(plan, run)));
    let sheet = Sheet {
        name: request.name.clone(),
        parameter,
        covariance: None,
    };
    let provenance = Provenance {
        program: Provenance::this_program(),
        pipeline: request.name.clone(),
        pipeline_blake3: blake3::hash(tail.as_bytes()).to_hex().to_string(),
        ..Provenance::default()
    };
    Ok(format!(
        "{}\n{tail}",
        ParameterFile::new(provenance, vec![sheet]).to_toml()
    ))
}

fn run_table(run: &MintedRun) -> RunTable {
    let PlaneCell { a, b } = run.plate.modes.cell;
    let wave = |row: &WaveRow| WaveTable {
        q_per_A: round_for_writing(row.q),
        modes: row.modes.clone(),
        kappa_eV: round_for_writing(row.kappa.value),
        kappa_error_eV: round_for_writing(row.kappa.error),
    };
    RunTable {
        name: run.name.clone(),
        trajectory: run.trajectory.clone(),
        temperature_K: run.plate.state.temperature,
        thermal_wave_number_per_A: round_for_writing(run.plate.state.thermal_wave_vector()),
        box_a_A: a.map(round_length),
        box_b_A: b.map(round_length),
        acceptance: round_for_writing(run.acceptance),
        long_chain_trajectories: run.long.trajectories,
        long_chain_acceptance: round_for_writing(run.long.acceptance),
        wave: run.long.waves.iter().map(wave).collect(),
    }
}

/// A length in A to 1e-8 A: the rounding of a sum that should be zero does not show.
fn round_length(length: f64) -> f64 {
    (length * 1e8).round() / 1e8 + 0.0
}

/// The bare plate: exact numbers that belong to all temperatures.
fn stated(plan: &PlatePlan) -> Vec<Parameter> {
    let request = &plan.request;
    [
        ("bending_rigidity_bare", request.kappa),
        ("lattice_term", request.lattice_term),
        ("youngs_modulus_bare", request.youngs * N_PER_M_PER_EV_PER_A2),
        ("poisson_ratio_bare", request.poisson),
    ]
    .into_iter()
    .map(|(name, value)| Parameter {
        tension_N_per_m: None,
        ..record(name, exact(value), "stated")
    })
    .collect()
}

/// What the box and the temperature make of it.
fn of_run(plan: &PlatePlan, run: &MintedRun) -> Vec<Parameter> {
    let request = &plan.request;
    let state = &run.plate.state;
    let atoms = plan.lattice.atoms() as f64;
    let long = &run.long;
    let length = long.area.value.sqrt();
    let sampled = "long-chain";
    let mut records = Vec::new();
    if let Some(longest) = long.waves.first() {
        records.push(Parameter {
            length_A: Some(std::f64::consts::TAU / longest.q),
            ..record("bending_rigidity", longest.kappa, sampled)
        });
    }
    let sized = |parameter: Parameter| Parameter {
        length_A: Some(length),
        ..parameter
    };
    if let Some(stiffness) = &long.stiffness {
        let names = [
            "stiffness_11",
            "stiffness_22",
            "stiffness_12",
            "stiffness_66",
            "youngs_modulus",
            "bulk_modulus",
        ];
        let [moduli @ .., poisson] = stiffness;
        for (name, modulus) in names.into_iter().zip(moduli) {
            records.push(sized(record(
                name,
                scaled(*modulus, N_PER_M_PER_EV_PER_A2),
                sampled,
            )));
        }
        records.push(sized(record(
            "shear_modulus",
            scaled(stiffness[3], N_PER_M_PER_EV_PER_A2),
            sampled,
        )));
        records.push(sized(record("poisson_ratio", *poisson, sampled)));
    }
    let excess = long.excess_area;
    let slope = (2.0 * excess.value).sqrt();
    records.extend([
        record("area_per_atom", scaled(long.area, 1.0 / atoms), sampled),
        record("excess_area", excess, sampled),
        record(
            "rms_slope",
            Measured {
                value: slope,
                error: excess.error / slope,
            },
            sampled,
        ),
        record("tension", exact(state.tension * N_PER_M_PER_EV_PER_A2), "stated"),
        record(
            "thermal_length",
            exact(plate::thermal_length(
                state.kappa,
                state.youngs,
                state.temperature,
            )),
            "stated",
        ),
    ]);
    records
        .into_iter()
        .map(|parameter| Parameter {
            run: Some(run.name.clone()),
            temperature_K: Some(state.temperature),
            tension_N_per_m: Some(request.tension * N_PER_M_PER_EV_PER_A2),
            ..parameter
        })
        .collect()
}

fn record(name: &str, number: Measured, method: &str) -> Parameter {
    let reach = NORMAL_95 * number.error;
    Parameter {
        name: name.to_owned(),
        run: None,
        temperature_K: None,
        tension_N_per_m: None,
        length_A: None,
        value: Some(number.value),
        error: Some(number.error),
        interval95: Some([number.value - reach, number.value + reach]),
        unit: look_up(name).map_or_else(String::new, |row| row.unit.to_owned()),
        method: method.to_owned(),
        verdict: Verdict::Good,
        note: String::new(),
    }
}

fn exact(value: f64) -> Measured {
    Measured { value, error: 0.0 }
}

fn scaled(number: Measured, factor: f64) -> Measured {
    Measured {
        value: number.value * factor,
        error: number.error * factor,
    }
}
