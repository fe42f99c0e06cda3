//! The programs that `whole-run.sh` sets beside planish: one that writes a large text dump, and two that only read it.
//!
//! `dump ATOMS FRAMES PATH` writes a planar honeycomb with thermal noise, `parse PATH` is the bare parse (newline search
//! and the parse of the coordinate columns, nothing else), `chemfiles PATH` reads every frame through chemfiles.
//! `parse` and `chemfiles` print the seconds they took and a sum that must agree. Without a command nothing is done, so
//! that `cargo bench` can run every bench once.

use std::error::Error;
use std::fs::File;
use std::io::{BufWriter, Read, Write};
use std::time::Instant;

use rand::{RngExt, SeedableRng};
use rand_xoshiro::Xoshiro256PlusPlus;

/// Bond length of graphene, in A.
const BOND: f64 = 1.42;

/// Bytes of the file that the bare parse holds at a time.
const CHUNK: usize = 1 << 18;

fn main() -> Result<(), Box<dyn Error>> {
    let words: Vec<String> = std::env::args().skip(1).collect();
    match words.iter().map(String::as_str).collect::<Vec<_>>()[..] {
        ["dump", atoms, frames, path] => dump(atoms.parse()?, frames.parse()?, path),
        ["parse", path] => timed(|| parse(path)),
        ["chemfiles", path] => timed(|| through_chemfiles(path)),
        _ => Ok(()),
    }
}

fn timed(read: impl FnOnce() -> Result<f64, Box<dyn Error>>) -> Result<(), Box<dyn Error>> {
    let start = Instant::now();
    let sum = read()?;
    writeln!(
        std::io::stdout(),
        "{:.4} {sum:.6e}",
        start.elapsed().as_secs_f64()
    )?;
    Ok(())
}

/// Writes a nearly square honeycomb of about `atoms` atoms with the columns `id type x y z` and six decimals.
fn dump(atoms: usize, frames: usize, path: &str) -> Result<(), Box<dyn Error>> {
    let mut file = BufWriter::with_capacity(1 << 20, File::create(path)?);
    // Rectangular cells of four atoms, 3 bonds long and sqrt(3) bonds wide, as nearly square as they can lie.
    let (long, wide) = (3.0 * BOND, 3.0_f64.sqrt() * BOND);
    let rows = ((atoms as f64 / 4.0 * wide / long).sqrt().round() as usize).max(1);
    let columns = (atoms / 4 / rows).max(1);
    let (x_edge, y_edge) = (rows as f64 * long, columns as f64 * wide);
    let basis = [[0.0, 0.0], [0.5, 0.5], [1.0 / 3.0, 0.0], [5.0 / 6.0, 0.5]];
    let mut random = Xoshiro256PlusPlus::seed_from_u64(1);
    for frame in 0..frames {
        writeln!(
            file,
            "ITEM: TIMESTEP\n{}\nITEM: NUMBER OF ATOMS\n{}",
            400 * frame,
            rows * columns * 4
        )?;
        writeln!(
            file,
            "ITEM: BOX BOUNDS pp pp pp\n0 {x_edge}\n0 {y_edge}\n-15 15\nITEM: ATOMS id type x y z"
        )?;
        let mut id = 0;
        for row in 0..rows {
            for column in 0..columns {
                for site in basis {
                    id += 1;
                    // Uniform noise of the width of thermal motion at 300 K: no distribution is asked of it here.
                    let [dx, dy, dz] = [0.12, 0.12, 0.6].map(|width| width * (random.random::<f64>() - 0.5));
                    let (x, y) = (
                        (row as f64 + site[0]) * long + dx,
                        (column as f64 + site[1]) * wide + dy,
                    );
                    writeln!(file, "{id} 1 {x:.6} {y:.6} {dz:.6}")?;
                }
            }
        }
    }
    file.flush()?;
    Ok(())
}

/// The least that a reader of the coordinates can do: lines by newline search, three columns of each parsed.
fn parse(path: &str) -> Result<f64, Box<dyn Error>> {
    let mut file = File::open(path)?;
    let mut buffer = vec![0; CHUNK];
    let (mut filled, mut sum) = (0, 0.0);
    let mut in_table = false;
    loop {
        let count = file.read(&mut buffer[filled..])?;
        if count == 0 {
            return Ok(sum);
        }
        filled += count;
        let mut start = 0;
        for end in memchr::memchr_iter(b'\n', &buffer[..filled]) {
            let line = &buffer[start..end];
            start = end + 1;
            if line.starts_with(b"ITEM:") {
                in_table = line.starts_with(b"ITEM: ATOMS");
            } else if in_table {
                let place = memchr::memchr_iter(b' ', line).nth(1).ok_or("a short line")? + 1;
                let mut rest = &line[place..];
                for _ in 0..3 {
                    let (value, used) = fast_float2::parse_partial::<f64, _>(rest)?;
                    sum += value;
                    rest = rest.get(used + 1..).unwrap_or_default();
                }
            }
        }
        buffer.copy_within(start..filled, 0);
        filled -= start;
    }
}

/// Every frame through chemfiles, in order.
fn through_chemfiles(path: &str) -> Result<f64, Box<dyn Error>> {
    let mut file = chemfiles::Trajectory::open(path, 'r')?;
    let mut frame = chemfiles::Frame::new();
    let mut sum = 0.0;
    for _ in 0..file.nsteps() {
        file.read(&mut frame)?;
        sum += frame.positions().iter().flatten().sum::<f64>();
    }
    Ok(sum)
}
