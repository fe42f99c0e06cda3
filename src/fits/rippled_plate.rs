//! The rippled plate: box SCSA at the held tension, with kappa, lattice term and Y free, from one run's heights alone.

use nalgebra::DVector;
use rayon::prelude::*;

use super::mode_verdict::{Judgement, advice, too_few_frames};
use super::plate_covariance::PlateCovariance;
use super::plate_run::{self, PlateRun, judged, without_value};
use super::ripple_model::{PARAMETERS, RippleFit, RippleModel, YoungsLimit};
use super::window::{self, ChosenWindow};
use super::{Covariance, Fit, FitOptions, Fitted, FittedValue, PlateModel, Quantity, Verdict};
use crate::estimates::{RunEstimates, SheetEstimates, Tension};
use crate::theory::plate::{crossover_tension, foppl_von_karman, thermal_length};
use crate::theory::{PlateParameter, Response};
use crate::units::N_PER_M_PER_EV_PER_A2;

/// kappa, b and Y of each run's bare plate, and its renormalised kappa at the smallest q. Verdicts by [`super::mode_verdict`],
/// the window by `window`, errors by [`super::plate_covariance`].
pub struct RippledPlate;

const METHOD: &str = "height-spectrum box-scsa";

const RIGIDITY: (&str, &str) = ("bending_rigidity", "eV");
const BARE_RIGIDITY: (&str, &str) = ("bending_rigidity_bare", "eV");
const BARE_YOUNGS: (&str, &str) = ("youngs_modulus_bare", "N/m");
const LATTICE_TERM: (&str, &str) = ("lattice_term", "A^2");
const THERMAL_LENGTH: (&str, &str) = ("thermal_length", "A");
const CROSSOVER_TENSION: (&str, &str) = ("crossover_tension", "N/m");
const FOPPL_VON_KARMAN: (&str, &str) = ("foppl_von_karman", "1");

/// The quantities of the bare plate.
const BARE: [(&str, &str); 6] = [
    BARE_RIGIDITY,
    BARE_YOUNGS,
    LATTICE_TERM,
    THERMAL_LENGTH,
    CROSSOVER_TENSION,
    FOPPL_VON_KARMAN,
];

/// With a larger relative error Y lies within two errors of none, and the heights do not tell it.
const LARGEST_YOUNGS_ERROR: f64 = 0.5;

const CLAMPED: &str =
    "the cell is fixed: a clamped cell stiffens the longest waves, by some 20 % in small sheets";

impl Fit for RippledPlate {
    fn name(&self) -> &'static str {
        "rippled_plate"
    }

    fn fit(&self, sheet: &SheetEstimates, options: &FitOptions) -> Fitted {
        let mut fitted = Fitted::default();
        if options.plate != PlateModel::Rippled {
            return fitted;
        }
        let runs: Vec<Fitted> = sheet.runs.par_iter().map(|run| fit_run(run, options)).collect();
        for run in runs {
            fitted.quantities.extend(run.quantities);
            fitted.covariances.extend(run.covariances);
            fitted.plate_curves.extend(run.plate_curves);
        }
        fitted
    }
}

fn fit_run(run: &RunEstimates, options: &FitOptions) -> Fitted {
    // Without this the reason given would be that no plate fits what is mostly noise.
    if let Some(reason) = too_few_frames(run.frames) {
        return refused(run, &reason);
    }
    let Some(plate_run) = PlateRun::new(run, options) else {
        return refused(
            run,
            "no mode of the height spectrum lies in the zone and the window",
        );
    };
    let model = RippleModel::new(&plate_run);
    let fit_first = |count: usize, near: Option<&RippleFit>| model.fit_first(count, near);
    let chosen = match options.window {
        Some([_, end]) => window::stated(&plate_run.lengths, end, fit_first),
        None => window::choose(&plate_run.lengths, fit_first),
    };
    let Some(chosen) = chosen else {
        return refused(
            run,
            "no rippled plate fits the heights in any window of six modes or more",
        );
    };
    read_out(&plate_run, &model, &chosen, options)
        .unwrap_or_else(|| refused(run, "the heights do not determine the plate's parameters"))
}

fn refused(run: &RunEstimates, note: &str) -> Fitted {
    let condition = plate_run::condition(run, None);
    let all = std::iter::once(&RIGIDITY).chain(&BARE);
    Fitted {
        quantities: all
            .map(|&name| without_value(name, condition.clone(), METHOD, note))
            .collect(),
        ..Fitted::default()
    }
}

/// Everything read from the chosen window's fit; `None` where it leaves the parameters undetermined.
fn read_out(
    plate_run: &PlateRun<'_>,
    model: &RippleModel<'_>,
    chosen: &ChosenWindow<RippleFit>,
    options: &FitOptions,
) -> Option<Fitted> {
    let run = plate_run.run;
    let fit = &chosen.fit;
    let mut parameters = PARAMETERS.to_vec();
    parameters.push(PlateParameter::Tension);
    let responses = model.solver().responses(&fit.solution, &parameters).ok()?;
    let covariance = covariance(plate_run, model, chosen, &responses)?;
    let judgement = judge(plate_run, chosen);
    let window_text = plate_run.describe_window(chosen, fit.kappa_smallest);
    let method = format!("{METHOD}, {window_text}");

    let smallest = model.smallest();
    let gradient = DVector::from_iterator(
        3,
        responses[..3].iter().map(|response| response.ln_kappa[smallest]),
    );
    let error = covariance
        .variance(&gradient, responses[3].ln_kappa[smallest])
        .sqrt();
    let mut of_rigidity = judgement.clone();
    if let Some(advice) = advice(error, options.wanted_error) {
        of_rigidity.remark(advice);
    }
    let mut quantities = vec![judged(
        RIGIDITY,
        plate_run.condition(Some(plate_run.longest_wave())),
        FittedValue::positive(fit.kappa_smallest, fit.kappa_smallest * error),
        method,
        &of_rigidity,
    )];
    quantities.extend(bare_quantities(
        plate_run,
        fit,
        &covariance,
        &judgement,
        &window_text,
    ));

    let curve = |index: usize| model.place(index).map(|place| fit.solution.kappa[place]);
    let mut fitted = Fitted {
        quantities,
        ..Fitted::default()
    };
    if judgement.verdict != Verdict::Unusable {
        fitted.plate_curves.push(plate_run.curve(chosen.modes, curve));
        if fit.youngs_limit.is_none() && youngs_is_told(&covariance) && !run.cell_is_fixed() {
            fitted.covariances.push(bare_covariance(run, fit, &covariance));
        }
    }
    Some(fitted)
}

fn covariance(
    plate_run: &PlateRun<'_>,
    model: &RippleModel<'_>,
    chosen: &ChosenWindow<RippleFit>,
    responses: &[Response],
) -> Option<PlateCovariance> {
    let run = plate_run.run;
    let places = model.places(chosen.modes);
    let by_tension: Vec<f64> = places.iter().map(|&place| responses[3].ln_power[place]).collect();
    PlateCovariance::new(
        &chosen.fit.likelihood,
        &plate_run.samples[..chosen.modes],
        &plate_run.block_powers(chosen.modes),
        &run.spectrum.block_frames,
        Some((&by_tension, run.tension.error())),
    )
}

/// What holds for every value of the run.
fn judge(plate_run: &PlateRun<'_>, chosen: &ChosenWindow<RippleFit>) -> Judgement {
    let mut judgement = plate_run.judge(chosen.modes);
    if !chosen.accepted {
        judgement.at_most(
            Verdict::Weak,
            "no window was found in which the plate passes through the heights",
        );
    }
    if plate_run.run.cell_is_fixed() {
        judgement.at_most(Verdict::Weak, CLAMPED);
    }
    if plate_run.run.tension == Tension::Assumed {
        judgement.remark("tension taken as 0 N/m: neither the pipeline nor a thermo series states it");
    }
    judgement
}

/// The bare plate and the scales that follow from it, in the order of [`BARE`].
fn bare_quantities(
    plate_run: &PlateRun<'_>,
    fit: &RippleFit,
    covariance: &PlateCovariance,
    judgement: &Judgement,
    window_text: &str,
) -> Vec<Quantity> {
    let run = plate_run.run;
    let method = format!("{METHOD}, heights alone, one run, {window_text}");
    if run.cell_is_fixed() {
        let note = format!("{CLAMPED}, and gives no bare parameters");
        let condition = || plate_run.condition(None);
        return BARE
            .iter()
            .map(|&name| without_value(name, condition(), &method, note.clone()))
            .collect();
    }
    let state = &fit.solution.state;
    let size = run.area.value.sqrt();
    let per_metre = N_PER_M_PER_EV_PER_A2;
    // Value and gradient of its logarithm by ln kappa, b, ln Y; whether it needs Y.
    let logarithmic = [
        (BARE_RIGIDITY, None, state.kappa, [1.0, 0.0, 0.0], false),
        (BARE_YOUNGS, None, state.youngs * per_metre, [0.0, 0.0, 1.0], true),
        (
            THERMAL_LENGTH,
            None,
            thermal_length(state.kappa, state.youngs, state.temperature),
            [1.0, 0.0, -0.5],
            true,
        ),
        (
            CROSSOVER_TENSION,
            None,
            crossover_tension(state.kappa, state.youngs, state.temperature) * per_metre,
            [-1.0, 0.0, 1.0],
            true,
        ),
        (
            FOPPL_VON_KARMAN,
            Some(size),
            foppl_von_karman(state.kappa, state.youngs, size),
            [-1.0, 0.0, 1.0],
            true,
        ),
    ];
    let mut quantities: Vec<Quantity> = logarithmic
        .into_iter()
        .map(|(name, length, value, gradient, needs_youngs)| {
            let relative = covariance
                .variance(&DVector::from_row_slice(&gradient), 0.0)
                .sqrt();
            let mut judgement = judgement.clone();
            youngs_reasons(&mut judgement, fit.youngs_limit, needs_youngs);
            if needs_youngs && fit.youngs_limit.is_none() && !youngs_is_told(covariance) {
                let reason = "the stiffening by ripples that the heights of this run show is within two errors of none, so they do not tell Y";
                judgement.at_most(Verdict::Unusable, reason);
            }
            let value = FittedValue::positive(value, value * relative);
            judged(
                name,
                plate_run.condition(length),
                value,
                method.clone(),
                &judgement,
            )
        })
        .collect();
    let error = covariance
        .variance(&DVector::from_row_slice(&[0.0, 1.0, 0.0]), 0.0)
        .sqrt();
    let mut of_lattice_term = judgement.clone();
    youngs_reasons(&mut of_lattice_term, fit.youngs_limit, false);
    let value = FittedValue::symmetric(state.lattice_term, error);
    quantities.insert(
        2,
        judged(
            LATTICE_TERM,
            plate_run.condition(None),
            value,
            method,
            &of_lattice_term,
        ),
    );
    quantities
}

/// Whether the error of ln Y leaves a Y to speak of.
fn youngs_is_told(covariance: &PlateCovariance) -> bool {
    covariance
        .variance(&DVector::from_row_slice(&[0.0, 0.0, 1.0]), 0.0)
        .sqrt()
        <= LARGEST_YOUNGS_ERROR
}

/// What a Y that ran into its limits means for a bare value.
fn youngs_reasons(judgement: &mut Judgement, limit: Option<YoungsLimit>, needs_youngs: bool) {
    let reason = match limit {
        None => return,
        Some(YoungsLimit::Vanishes) => {
            "the heights of this run show no stiffening by ripples, so they do not tell Y"
        }
        Some(YoungsLimit::Unbounded) => {
            "the heights of this run fit any Y above some value, so they do not tell it"
        }
    };
    judgement.at_most(
        if needs_youngs {
            Verdict::Unusable
        } else {
            Verdict::Weak
        },
        reason,
    );
}

/// Covariance of kappa (eV), Y (N/m) and b (A^2) of the bare plate.
fn bare_covariance(run: &RunEstimates, fit: &RippleFit, covariance: &PlateCovariance) -> Covariance {
    let state = &fit.solution.state;
    let gradients = [
        DVector::from_row_slice(&[state.kappa, 0.0, 0.0]),
        DVector::from_row_slice(&[0.0, 0.0, state.youngs * N_PER_M_PER_EV_PER_A2]),
        DVector::from_row_slice(&[0.0, 1.0, 0.0]),
    ];
    Covariance {
        run: Some(run.name.clone()),
        names: [BARE_RIGIDITY, BARE_YOUNGS, LATTICE_TERM]
            .map(|(name, _)| name.to_owned())
            .to_vec(),
        matrix: covariance.of_quantities(&gradients),
    }
}
