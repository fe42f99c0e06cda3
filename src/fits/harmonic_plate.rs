//! The harmonic plate: kappa (1 - b q^2) q^4 + sigma q^2 with kappa, b and sigma free, where the pipeline asks for it.

use nalgebra::{DMatrix, DVector};

use super::mode_verdict::{advice, too_few_frames};
use super::plate_covariance::PlateCovariance;
use super::plate_likelihood::{LikelihoodFit, ModelPoint, PowerModel, maximise};
use super::plate_run::{self, PlateRun, judged, without_value};
use super::window::{self, ChosenWindow, WindowFit};
use super::{Covariance, Fit, FitOptions, Fitted, FittedValue, PlateModel, Verdict, lack_of_fit};
use crate::estimates::{RunEstimates, SheetEstimates};
use crate::theory::PlateState;
use crate::theory::plate::harmonic_power;
use crate::units::N_PER_M_PER_EV_PER_A2;

/// kappa, b and the tension of each run's plate without ripples.
pub struct HarmonicPlate;

const METHOD: &str = "height-spectrum harmonic";

const RIGIDITY: (&str, &str) = ("bending_rigidity", "eV");
const TENSION: (&str, &str) = ("tension", "N/m");
const LATTICE_TERM: (&str, &str) = ("lattice_term", "A^2");

const RIPPLES: &str = "a free tension takes up the stiffening by ripples: this is the tension that the heights show, not the one held";

impl Fit for HarmonicPlate {
    fn name(&self) -> &'static str {
        "harmonic_plate"
    }

    fn fit(&self, sheet: &SheetEstimates, options: &FitOptions) -> Fitted {
        let mut fitted = Fitted::default();
        if options.plate != PlateModel::Harmonic {
            return fitted;
        }
        for run in &sheet.runs {
            let of_run = fit_run(run, options);
            fitted.quantities.extend(of_run.quantities);
            fitted.covariances.extend(of_run.covariances);
            fitted.plate_curves.extend(of_run.plate_curves);
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
    let fit_first = |count: usize, near: Option<&HarmonicFit>| HarmonicFit::new(&plate_run, count, near);
    let chosen = match options.window {
        Some([_, end]) => window::stated(&plate_run.lengths, end, fit_first),
        None => window::choose(&plate_run.lengths, fit_first),
    };
    let Some(chosen) = chosen else {
        return refused(
            run,
            "no harmonic plate fits the heights in any window of six modes or more",
        );
    };
    read_out(&plate_run, &chosen, options)
        .unwrap_or_else(|| refused(run, "the heights do not determine the plate's parameters"))
}

fn refused(run: &RunEstimates, note: &str) -> Fitted {
    let quantities = [RIGIDITY, LATTICE_TERM, TENSION]
        .map(|name| without_value(name, plate_run::condition(run, None), METHOD, note))
        .to_vec();
    Fitted {
        quantities,
        ..Fitted::default()
    }
}

fn read_out(
    plate_run: &PlateRun<'_>,
    chosen: &ChosenWindow<HarmonicFit>,
    options: &FitOptions,
) -> Option<Fitted> {
    let run = plate_run.run;
    let fit = &chosen.fit;
    let covariance = PlateCovariance::new(
        &fit.likelihood,
        &plate_run.samples[..chosen.modes],
        &plate_run.block_powers(chosen.modes),
        &run.spectrum.block_frames,
        None,
    )?;
    let mut judgement = plate_run.judge(chosen.modes);
    if !chosen.accepted {
        judgement.at_most(
            Verdict::Weak,
            "no window was found in which the plate passes through the heights",
        );
    }
    if run.cell_is_fixed() {
        judgement.at_most(
            Verdict::Weak,
            "the cell is fixed: a clamped cell stiffens the longest waves",
        );
    }
    let method = format!(
        "{METHOD}, {}",
        plate_run.describe_window(chosen, fit.rigidity(plate_run.smallest))
    );

    let smallest = plate_run.smallest;
    let rigidity = fit.rigidity(smallest);
    let of_rigidity = fit.rigidity_gradient(smallest);
    let square = fit.reference * fit.reference;
    // sigma = P - kappa(q1) q1^2 with q1 the reference wave.
    let mut of_tension = -fit.rigidity_gradient(fit.reference) * square;
    of_tension[2] += fit.reference_stiffness();
    let of_tension = of_tension * N_PER_M_PER_EV_PER_A2;
    let of_lattice_term = DVector::from_row_slice(&[0.0, 1.0, 0.0]);
    let error = |gradient: &DVector<f64>| covariance.variance(gradient, 0.0).sqrt();

    let mut for_rigidity = judgement.clone();
    if let Some(advice) = advice(error(&of_rigidity) / rigidity, options.wanted_error) {
        for_rigidity.remark(advice);
    }
    let mut for_tension = judgement.clone();
    for_tension.remark(RIPPLES);
    let tension = fit.tension() * N_PER_M_PER_EV_PER_A2;
    let value = FittedValue::positive(rigidity, error(&of_rigidity));
    let length = Some(plate_run.longest_wave());
    let lattice_term = FittedValue::symmetric(fit.state().lattice_term, error(&of_lattice_term));
    let quantities = vec![
        judged(
            RIGIDITY,
            plate_run.condition(length),
            value,
            method.clone(),
            &for_rigidity,
        ),
        judged(
            LATTICE_TERM,
            plate_run.condition(None),
            lattice_term,
            method.clone(),
            &judgement,
        ),
        judged(
            TENSION,
            plate_run.condition(None),
            FittedValue::symmetric(tension, error(&of_tension)),
            method,
            &for_tension,
        ),
    ];
    let mut fitted = Fitted {
        quantities,
        ..Fitted::default()
    };
    if judgement.verdict != Verdict::Unusable {
        let modes = &run.spectrum.modes;
        let curve =
            |index: usize| (modes[index].zone_weight > 0.0).then(|| fit.rigidity(modes[index].length));
        fitted.plate_curves.push(plate_run.curve(chosen.modes, curve));
        fitted.covariances.push(Covariance {
            run: Some(run.name.clone()),
            names: [RIGIDITY, LATTICE_TERM, TENSION]
                .map(|(name, _)| name.to_owned())
                .to_vec(),
            matrix: covariance.of_quantities(&[of_rigidity, of_lattice_term, of_tension]),
        });
    }
    Some(fitted)
}

/// The fit in one window. Parameters: ln kappa, b in A^2, ln P, with P = kappa(q1) q1^2 + sigma at the window's first wave
/// q1: the stiffness stays positive there, and so everywhere, whatever the sign of sigma.
#[derive(Clone, Debug, PartialEq)]
struct HarmonicFit {
    likelihood: LikelihoodFit,
    /// q1, in 1/A.
    reference: f64,
    smallest: f64,
    last: f64,
    probability: Option<f64>,
}

impl HarmonicFit {
    fn new(plate_run: &PlateRun<'_>, count: usize, near: Option<&Self>) -> Option<Self> {
        /// A start for b, in A^2: that of one-plane hexagonal sheets.
        const LATTICE_TERM: f64 = 0.25;
        const PARAMETERS: usize = 3;
        if count <= PARAMETERS {
            return None;
        }
        let run = plate_run.run;
        let samples = &plate_run.samples[..count];
        let mut model = HarmonicModel {
            lengths: &plate_run.lengths[..count],
            area: run.spectrum.cell.area(),
            temperature: run.temperature,
        };
        let stiffness = |sample: &super::plate_likelihood::ModeSample| {
            harmonic_power(model.area, 1.0, 0.0, model.temperature, sample.length) / sample.power
        };
        let half = &samples[count / 2..];
        let kappa = half.len() as f64 / half.iter().map(|sample| 1.0 / stiffness(sample)).sum::<f64>();
        let first = samples[0].length;
        let guess = vec![kappa.ln(), LATTICE_TERM, (kappa * first * first).ln()];
        let start = near.map_or(guess, |near| near.likelihood.parameters.clone());
        let likelihood = maximise(&mut model, samples, &start, &[None; PARAMETERS])?;
        Some(Self {
            probability: lack_of_fit::probability(&likelihood, samples),
            likelihood,
            reference: first,
            smallest: plate_run.smallest,
            last: samples[count - 1].length,
        })
    }

    fn state(&self) -> PlateState {
        plate(&self.likelihood.parameters)
    }

    fn rigidity(&self, q: f64) -> f64 {
        self.state().bare_kappa(q)
    }

    fn rigidity_gradient(&self, q: f64) -> DVector<f64> {
        DVector::from_row_slice(&rigidity_gradient(&self.state(), q))
    }

    fn reference_stiffness(&self) -> f64 {
        self.likelihood.parameters[2].exp()
    }

    fn tension(&self) -> f64 {
        self.reference_stiffness() - self.rigidity(self.reference) * self.reference * self.reference
    }
}

impl WindowFit for HarmonicFit {
    fn probability(&self) -> Option<f64> {
        self.probability
    }

    fn is_in_range(&self) -> bool {
        self.state().lattice_term * self.last * self.last <= 0.5
    }

    fn value(&self) -> f64 {
        self.rigidity(self.smallest)
    }
}

fn plate(parameters: &[f64]) -> PlateState {
    PlateState {
        kappa: parameters[0].exp(),
        youngs: 0.0,
        lattice_term: parameters[1],
        tension: 0.0,
        temperature: 0.0,
    }
}

/// Of kappa(q) by ln kappa, b and ln P.
fn rigidity_gradient(state: &PlateState, q: f64) -> [f64; 3] {
    let kappa = state.bare_kappa(q);
    let on_floor = state.lattice_term * q * q >= 0.5;
    [kappa, if on_floor { 0.0 } else { -state.kappa * q * q }, 0.0]
}

struct HarmonicModel<'a> {
    lengths: &'a [f64],
    area: f64,
    temperature: f64,
}

impl PowerModel for HarmonicModel<'_> {
    fn evaluate(&mut self, parameters: &[f64]) -> Option<ModelPoint> {
        let state = plate(parameters);
        let first = self.lengths[0];
        let reference = parameters[2].exp();
        let tension = reference - state.bare_kappa(first) * first * first;
        let of_first = rigidity_gradient(&state, first);
        let mut ln_power = DVector::zeros(self.lengths.len());
        let mut derivatives = DMatrix::zeros(self.lengths.len(), parameters.len());
        for (mode, &q) in self.lengths.iter().enumerate() {
            let stiffness = state.bare_kappa(q) * q * q + tension;
            if stiffness.is_nan() || stiffness <= 0.0 {
                return None;
            }
            ln_power[mode] =
                harmonic_power(self.area, state.bare_kappa(q), tension, self.temperature, q).ln();
            let of_mode = rigidity_gradient(&state, q);
            for parameter in 0..parameters.len() {
                let by_rigidity = of_mode[parameter] * q * q - of_first[parameter] * first * first;
                let by_reference = if parameter == 2 { reference } else { 0.0 };
                derivatives[(mode, parameter)] = -(by_rigidity + by_reference) / stiffness;
            }
        }
        Some(ModelPoint {
            ln_power,
            derivatives,
        })
    }
}
