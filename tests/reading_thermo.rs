//! Thermo series: every format and unit in which they come in, and what is said of those that cannot be used.
//!
//! Numbers to compare with are worked out by hand from the definitions of the units: 1 bar = 1e5 Pa, 1 atm = 101325 Pa,
//! 1 cal = 4.184 J (thermochemical), and from CODATA 2018: 1 eV = 1.602176634e-19 J, 1 eV/A^3 = 160.2176634 GPa,
//! 1 hartree = 27.211386245988 eV, 1 bohr = 0.529177210903 A, N_A = 6.02214076e23/mol.

use std::fs;
use std::path::PathBuf;

use planish::frames::{CellAxis, EngineUnits, ThermoSeries};
use rstest::rstest;
use tempfile::TempDir;

/// Writes the text and reads it back as a thermo series.
fn read(name: &str, text: &str, units: Option<EngineUnits>) -> Result<ThermoSeries, String> {
    let folder = TempDir::new().expect("a temporary folder");
    let path: PathBuf = folder.path().join(name);
    fs::write(&path, text).expect("the temporary folder can be written");
    ThermoSeries::read(&path, units).map_err(|error| error.to_string())
}

#[track_caller]
fn refused(name: &str, text: &str, units: Option<EngineUnits>, parts: &[&str]) {
    let message = read(name, text, units).expect_err("the file is bad");
    for part in parts {
        assert!(message.contains(part), "\"{part}\" is not in: {message}");
    }
}

#[track_caller]
fn close(found: Option<&Vec<f64>>, wanted: &[f64]) {
    let found = found.expect("the series is there");
    assert_eq!(found.len(), wanted.len());
    for (found, wanted) in found.iter().zip(wanted) {
        assert!(
            (found - wanted).abs() <= 1e-9 * wanted.abs(),
            "{found} is not {wanted}"
        );
    }
}

#[test]
fn csv_columns_carry_their_units() {
    let text = "step,time_fs,temperature_K,potential_energy_kcal_per_mol,total_eV,enthalpy_eV,lx_nm,ly_bohr,lz_A,pxx_bar,pyy_GPa,pxy_atm\n\
                # a comment\n\
                0,0,300,1,-7.5,-7,5.2,100,60,1000,0.1,1\n\
                10,2.5,301.5,2,-7.6,-7,5.3,100,60,-1000,0.2,2\n";
    let series = read("t.csv", text, None).expect("a good file");
    assert_eq!(series.len(), 2);
    close(series.step.as_ref(), &[0.0, 10.0]);
    close(series.time_ps.as_ref(), &[0.0, 0.0025]);
    close(series.temperature_k.as_ref(), &[300.0, 301.5]);
    // 4184 / 6.02214076e23 / 1.602176634e-19
    close(
        series.potential_ev.as_ref(),
        &[0.043_364_104_241_800_93, 0.086_728_208_483_601_86],
    );
    close(series.total_ev.as_ref(), &[-7.5, -7.6]);
    close(series.cell_a[0].as_ref(), &[52.0, 53.0]);
    close(series.cell_a[1].as_ref(), &[52.917_721_090_3; 2]);
    close(series.cell_a[2].as_ref(), &[60.0; 2]);
    // 1000 bar are 0.1 GPa.
    close(
        series.pressure_ev_per_a3[0].as_ref(),
        &[0.1 / 160.217_663_4, -0.1 / 160.217_663_4],
    );
    close(
        series.pressure_ev_per_a3[1].as_ref(),
        &[0.1 / 160.217_663_4, 0.2 / 160.217_663_4],
    );
    let atm = 101_325e-9 / 160.217_663_4;
    close(series.pressure_ev_per_a3[3].as_ref(), &[atm, 2.0 * atm]);
    assert_eq!(series.pressure_ev_per_a3[2], None);
    assert_eq!(series.ignored, ["enthalpy_eV"]);
}

#[test]
fn tension_is_the_negative_mean_pressure_in_the_plane_times_the_height() {
    let text = "pxx_bar,pyy_bar,pzz_bar\n-1000,-3000,77\n";
    let series = read("t.csv", text, None).expect("a good file");
    // 2000 bar over 60 A: 2e8 Pa x 60e-10 m = 1.2 N/m, with 1 eV/A^2 = 16.02176634 N/m.
    close(series.tension(CellAxis::C, 60.0).as_ref(), &[1.2 / 16.021_766_34]);
    // Along a the plane holds y and z: (3000 - 77)/2 bar over 10 A.
    close(
        series.tension(CellAxis::A, 10.0).as_ref(),
        &[0.146_15 / 16.021_766_34],
    );
    let with_height = read("t.csv", "pxx_bar,pyy_bar,lz_A\n-1000,-3000,30\n", None).expect("a good file");
    close(
        with_height.tension(CellAxis::C, 60.0).as_ref(),
        &[0.6 / 16.021_766_34],
    );
    assert_eq!(with_height.tension(CellAxis::B, 60.0), None);
}

#[test]
fn csv_that_cannot_be_used_is_refused_with_its_line() {
    refused(
        "t.csv",
        "time_ps,pxx\n0,1\n",
        None,
        &["t.csv, line 1", "\"pxx\" has no unit", "bar", "pxx_bar"],
    );
    refused("t.csv", "time_ps,pxx_psi\n0,1\n", None, &["unit \"psi\"", "GPa"]);
    refused(
        "t.csv",
        "time_ps,lx_A\n0,1\n\n1,x2\n",
        None,
        &["t.csv, line 4: column 2: \"x2\" is not a number"],
    );
    refused(
        "t.csv",
        "time_ps,lx_A\n0,1\n1\n",
        None,
        &["line 3: 1 values, but 2 columns"],
    );
    refused("t.csv", "time_ps,lx_A\n0,nan\n", None, &["line 2", "finite"]);
    refused(
        "t.csv",
        "foo,bar\n0,1\n",
        None,
        &["no row of it holds a known quantity"],
    );
    refused("t.csv", "", None, &["is empty"]);
    refused(
        "t.txt",
        "hello\nworld\n",
        None,
        &["no table with named columns", "LAMMPS", ".xvg"],
    );
    let folder = TempDir::new().expect("a temporary folder");
    let message = |path| ThermoSeries::read(path, None).expect_err("bad").to_string();
    assert!(message(folder.path()).contains("is a directory"));
    assert!(message(&folder.path().join("none.csv")).contains("No such file"));
}

const LOG: &str = "LAMMPS (2 Aug 2023)\nunits real\nrun 20\n\
    Step          Temp          PotEng\n         0   10   5\n        10   11   6\n\
    Loop time of 0.1 on 1 procs for 10 steps with 12 atoms\n\
    Step Time Temp PotEng TotEng Lx Ly Lz Pxx Pyy Pxy Enthalpy\n\
    0 0 300 -10 -9 50 51 60 100 200 3 7\n\
    WARNING: something between the rows (src/x.cpp:1)\n\
    100 250 301 -11 -9.5 50.5 51 60 -100 -200 3 7\n\
    Loop time of 0.1 on 1 procs for 100 steps with 12 atoms\n\
    some output\n\
    Step Time Temp PotEng TotEng Lx Ly Lz Pxx Pyy Pxy Enthalpy\n\
    100 250 302 -12 -9.5 50.5 51 60 -100 -200 3 7\n\
    200 500 303 -13 -9.5 50.5 51 60 -100 -200 3 7\n\
    Loop time of 0.1 on 1 procs for 100 steps with 12 atoms\n";

#[test]
fn a_lammps_log_joins_its_runs() {
    let series = read("log.lammps", LOG, Some(EngineUnits::Real)).expect("a good log");
    close(series.step.as_ref(), &[0.0, 100.0, 200.0]);
    close(series.time_ps.as_ref(), &[0.0, 0.25, 0.5]);
    close(series.temperature_k.as_ref(), &[300.0, 302.0, 303.0]);
    let kcal = 0.043_364_104_241_800_93;
    close(
        series.potential_ev.as_ref(),
        &[-10.0 * kcal, -12.0 * kcal, -13.0 * kcal],
    );
    let atm = 101_325e-9 / 160.217_663_4;
    close(
        series.pressure_ev_per_a3[1].as_ref(),
        &[200.0 * atm, -200.0 * atm, -200.0 * atm],
    );
    close(series.cell_a[0].as_ref(), &[50.0, 50.5, 50.5]);
    assert_eq!(series.ignored, ["Enthalpy"]);
}

#[rstest]
#[case(EngineUnits::Metal, 1.0, 1.0, 1e5)]
#[case(EngineUnits::Real, 1e-3, 0.043_364_104_241_800_93, 101_325.0)]
#[case(EngineUnits::Electron, 1e-3, 27.211_386_245_988, 1.0)]
#[case(EngineUnits::Si, 1e12, 6.241_509_074_460_763e18, 1.0)]
#[case(EngineUnits::Gromacs, 1.0, 0.010_364_269_656_262_175, 1e5)]
fn logs_are_in_the_units_that_are_stated(
    #[case] units: EngineUnits,
    #[case] ps: f64,
    #[case] ev: f64,
    #[case] pascal: f64,
) {
    let text = "Step Time TotEng Pxx\n0 1 1 1\n";
    let series = read("log", text, Some(units)).expect("a good log");
    close(series.time_ps.as_ref(), &[ps]);
    close(series.total_ev.as_ref(), &[ev]);
    close(series.pressure_ev_per_a3[0].as_ref(), &[pascal / 160.217_663_4e9]);
}

#[test]
fn a_log_that_cannot_be_used_is_refused() {
    refused(
        "log",
        LOG,
        None,
        &["engine_units", "metal, real, electron, si, gromacs"],
    );
    let bad = LOG.replace("301 -11", "30l -11");
    refused(
        "log",
        &bad,
        Some(EngineUnits::Real),
        &["log, line 11: column 3: \"30l\" is not a number"],
    );
    let bad = LOG
        .replace("\n    200 500", "\n    2x0 500")
        .replace("\n200 500", "\n2x0 500");
    refused(
        "log",
        &bad,
        Some(EngineUnits::Real),
        &["line 16", "\"2x0\" is not a whole number"],
    );
    // A log that ends within a row, as that of a killed run does, is used up to there.
    let cut = &LOG[..LOG.find("303 -13").expect("the last row")];
    let series = read("log", cut, Some(EngineUnits::Real)).expect("a good log");
    assert_eq!(series.len(), 2);
    refused(
        "log",
        "LAMMPS (2023)\nunits metal\n",
        Some(EngineUnits::Metal),
        &["known quantity"],
    );
}

const XVG: &str = "# This file was created\n@    title \"GROMACS Energies\"\n@    xaxis  label \"Time (ps)\"\n\
    @    yaxis  label \"(kJ/mol), (K), (bar), (nm)\"\n@TYPE xy\n@ view 0.15, 0.15, 0.75, 0.85\n@ legend on\n@ legend box on\n\
    @ s0 legend \"Potential\"\n@ s1 legend \"Temperature\"\n@ s2 legend \"Pres-XX\"\n@ s3 legend \"Box-X\"\n@ s4 legend \"Density\"\n\
    0.000000  -100.0  300.0  1000.0  5.2  1.0\n    2.000000  -200.0  301.0  -1000.0  5.3  1.0\n";

#[test]
fn an_xvg_is_read_by_its_legends() {
    let series = read("energy.xvg", XVG, None).expect("a good file");
    close(series.time_ps.as_ref(), &[0.0, 2.0]);
    // 1000 / 6.02214076e23 / 1.602176634e-19
    let kj = 0.010_364_269_656_262_175;
    close(series.potential_ev.as_ref(), &[-100.0 * kj, -200.0 * kj]);
    close(series.temperature_k.as_ref(), &[300.0, 301.0]);
    close(
        series.pressure_ev_per_a3[0].as_ref(),
        &[0.1 / 160.217_663_4, -0.1 / 160.217_663_4],
    );
    close(series.cell_a[0].as_ref(), &[52.0, 53.0]);
    assert_eq!(series.ignored, ["Density"]);
    refused(
        "energy.xvg",
        &XVG.replace("301.0", "3o1.0"),
        None,
        &["energy.xvg, line 15: column 3: \"3o1.0\""],
    );
}

#[test]
fn a_cp2k_ener_file_is_read_in_atomic_units() {
    let text = "#     Step Nr.          Time[fs]        Kin.[a.u.]          Temp[K]            Pot.[a.u.]        Cons Qty[a.u.]        UsedTime[s]\n\
                0   0.0  0.1  300.0  -2.0  -1.9  0.0\n  1   0.5  0.1  310.0  -1.0  -1.9  1.5\n";
    let series = read("x-1.ener", text, None).expect("a good file");
    close(series.time_ps.as_ref(), &[0.0, 0.0005]);
    close(series.temperature_k.as_ref(), &[300.0, 310.0]);
    close(
        series.potential_ev.as_ref(),
        &[-54.422_772_491_976, -27.211_386_245_988],
    );
    assert_eq!(series.total_ev, None);
}

#[test]
fn a_compressed_series_is_read_like_a_plain_one() {
    let mut gz = flate2::write::GzEncoder::new(Vec::new(), flate2::Compression::fast());
    std::io::Write::write_all(&mut gz, XVG.as_bytes()).expect("memory");
    let folder = TempDir::new().expect("a temporary folder");
    let path = folder.path().join("energy.xvg.gz");
    fs::write(&path, gz.finish().expect("memory")).expect("the temporary folder can be written");
    let packed = ThermoSeries::read(&path, None).expect("a good file");
    assert_eq!(Ok(packed), read("energy.xvg", XVG, None));
}
