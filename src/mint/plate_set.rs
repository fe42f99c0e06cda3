//! A set of plate trajectories: sampled, written, and moved into place as a whole.

use std::fmt::Write as _;
use std::fs::{self, File};
use std::io;
use std::path::Path;

use rand::{Rng, SeedableRng};
use rand_xoshiro::Xoshiro256PlusPlus;

use super::long_chain::{SEEDS, hold_of, long_chain};
use super::plate_box::PlateBox;
use super::plate_request::PlatePlan;
use super::sheet_frames::SheetFrames;
use super::truth::{MintedRun, truth};
use super::{CellHold, MintError, PlateRequest, Progress};
use crate::frames::TrajectoryWriter;
use crate::parameters::round_for_writing;
use crate::report::OutputFolder;
use crate::units::N_PER_M_PER_EV_PER_A2;

/// How much longer than the trajectory's the chain is that the truth is read from.
const LONGER: usize = 10;

/// Name of the file with the atoms' species.
const TOPOLOGY: &str = "sheet.xyz";

/// Formats that keep the times of frames in a way that is read back.
const FORMATS_WITH_TIMES: [&str; 2] = ["trr", "xtc"];

/// Makes the set in a new folder `out`: the trajectories, `sheet.xyz` with the species, `truth.toml`, and the pipeline file
/// `NAME.toml` that measures it. The folder appears whole or not at all. The same request gives the same bytes, whatever the
/// number of threads.
///
/// # Errors
/// See [`MintError`].
pub fn mint_plate(
    request: &PlateRequest,
    out: &Path,
    threads: usize,
    progress: &dyn Progress,
) -> Result<(), MintError> {
    let outcome = mint_whole(request, out, threads, progress);
    progress.finished();
    outcome
}

fn mint_whole(
    request: &PlateRequest,
    out: &Path,
    threads: usize,
    progress: &dyn Progress,
) -> Result<(), MintError> {
    let plan = request.plan()?;
    if out.symlink_metadata().is_ok() {
        return Err(MintError::Exists(out.to_owned()));
    }
    let boxes: Vec<PlateBox> = request
        .temperatures
        .iter()
        .map(|&temperature| {
            PlateBox::new(&plan, temperature).map_err(|source| MintError::Plate { temperature, source })
        })
        .collect::<Result<_, _>>()?;
    let parent = match out.parent() {
        Some(parent) if parent != Path::new("") => parent,
        _ => Path::new("."),
    };
    let machine = |action: &'static str, path: &Path| {
        let path = path.to_owned();
        move |source: io::Error| MintError::Machine { path, action, source }
    };
    fs::create_dir_all(parent).map_err(machine("create the folder", parent))?;
    let aside = tempfile::Builder::new()
        .prefix(".planish-")
        .tempdir_in(parent)
        .map_err(machine("create a folder in", parent))?;
    let folder = OutputFolder::prepare(aside.path())?;
    let workers = rayon::ThreadPoolBuilder::new()
        .num_threads(threads)
        .build()
        .map_err(|error| machine("start threads to write", out)(io::Error::other(error)))?;

    progress.work_planned(boxes.len() * request.frames * request.spacing * (1 + LONGER));
    let mut seeds = Xoshiro256PlusPlus::seed_from_u64(request.seed);
    let mut runs = Vec::with_capacity(boxes.len());
    for plate in boxes {
        let run = mint_run(&plan, plate, aside.path(), &mut seeds, &workers, progress)?;
        runs.push(run);
    }
    folder.write("truth.toml", truth(&plan, &runs)?)?;
    folder.write(format!("{}.toml", request.name), pipeline(&plan, &runs))?;

    let written = runs.iter().map(|run| run.trajectory.as_str()).chain([TOPOLOGY]);
    for name in written {
        let path = aside.path().join(name);
        let synced = File::open(&path).and_then(|file| file.sync_all());
        synced.map_err(machine("sync", &path))?;
    }
    allow_others_to_enter(aside.path()).map_err(machine("set the permissions of", aside.path()))?;
    if out.symlink_metadata().is_ok() {
        return Err(MintError::Exists(out.to_owned()));
    }
    fs::rename(aside.path(), out).map_err(machine("rename into place", out))?;
    // The folder has moved away: there is nothing left to remove.
    let _ = aside.keep();
    Ok(())
}

/// Samples one temperature and writes its trajectory.
fn mint_run(
    plan: &PlatePlan,
    plate: PlateBox,
    folder: &Path,
    seeds: &mut Xoshiro256PlusPlus,
    workers: &rayon::ThreadPool,
    progress: &dyn Progress,
) -> Result<MintedRun, MintError> {
    let request = &plan.request;
    let temperature = plate.state.temperature;
    let name = format!("{temperature}K");
    let trajectory = format!("{name}.{}", request.format);
    let chain_seed = seeds.next_u64();
    let atoms = Xoshiro256PlusPlus::seed_from_u64(seeds.next_u64());
    let long_seeds: Vec<u64> = (0..SEEDS).map(|_| seeds.next_u64()).collect();

    let mut chain = plate
        .chain(plate.hold, chain_seed)
        .map_err(|source| MintError::Plate { temperature, source })?;
    let mut frames = SheetFrames::new(&plan.lattice, &plate, atoms);
    let species = frames.species();
    let mut writer = TrajectoryWriter::create(&folder.join(&trajectory), &species)?;
    for number in 0..request.frames {
        for _ in 0..request.spacing {
            chain.advance();
        }
        let time = number as f64 * request.frame_interval;
        let frame = frames.frame(chain.plate(), chain.heights(), time);
        if number == 0 {
            let mut topology = TrajectoryWriter::create(&folder.join(TOPOLOGY), &species)?;
            topology.write(&frame)?;
            topology.finish()?;
        }
        writer.write(&frame)?;
        progress.work_done(request.spacing);
    }
    writer.finish()?;
    let acceptance = chain.acceptance().unwrap_or(0.0);
    progress.note(&format!(
        "{name}: {acceptance:.2} of the trajectories were accepted"
    ));
    let hold = match plate.hold {
        CellHold::Free => CellHold::Free,
        _ => hold_of(chain.plate().condition()),
    };
    let trajectories = LONGER * request.frames * request.spacing;
    let long = workers.install(|| long_chain(&plate, hold, trajectories, &long_seeds, progress))?;
    Ok(MintedRun {
        name,
        trajectory,
        plate,
        long,
        acceptance,
    })
}

/// The pipeline file that measures the set.
fn pipeline(plan: &PlatePlan, runs: &[MintedRun]) -> String {
    let request = &plan.request;
    let name = &request.name;
    let tension = round_for_writing(request.tension * N_PER_M_PER_EV_PER_A2);
    let mut text = format!(
        "# Measures the synthetic trajectories beside it; what should come out is in truth.toml.\n#\n\
         #     planish run {name}.toml\n\n\
         [pipeline]\nname = \"{name}\"\n\n[[sheet]]\nname = \"{name}\"\n"
    );
    for run in runs {
        let temperature = run.plate.state.temperature;
        let _ = write!(
            text,
            "\n  [[sheet.run]]\n  name = \"{}\"\n  trajectory = \"{}\"\n  topology = \"{TOPOLOGY}\"\n  \
             temperature = \"{temperature} K\"\n  tension = \"{tension} N/m\"\n",
            run.name, run.trajectory
        );
        if !FORMATS_WITH_TIMES.contains(&request.format.as_str()) {
            let _ = writeln!(text, "  frame_interval = \"{} ps\"", request.frame_interval);
        }
    }
    if let Some(cut) = request.cut {
        // Waves at the cut are still; ripples make the mean box, and with it all wave numbers, a little larger than the
        // flat sheet's, so that the highest moving ones may be left out by this.
        let _ = write!(text, "\n[stage.spectrum]\nq_max = \"{cut} 1/angstrom\"\n");
    }
    text
}

/// Temporary folders are private to their maker; results are as readable as other new folders usually are.
#[cfg(unix)]
fn allow_others_to_enter(path: &Path) -> io::Result<()> {
    use std::os::unix::fs::PermissionsExt;
    fs::set_permissions(path, fs::Permissions::from_mode(0o755))
}

#[cfg(not(unix))]
#[allow(clippy::unnecessary_wraps)] // The other platform's version can fail.
fn allow_others_to_enter(_path: &Path) -> io::Result<()> {
    Ok(())
}
