//! Classic NetCDF: what a writer of our own and an independent reader agree on, and hostile files.

use std::path::{Path, PathBuf};
use std::process::Command;

use proptest::prelude::*;
use ventifact::files::error::FileError;
use ventifact::files::netcdf::{GridWinds, Netcdf};
use ventifact::ground::{LonLat, WindRecord};

use crate::netcdf_writer::{Layout, Numbers, Var, grid, text};

const NEW_YEAR_2001: i64 = 978_307_200;

fn written(bytes: &[u8]) -> (tempfile::TempDir, PathBuf) {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("winds.nc");
    std::fs::write(&path, bytes).expect("written");
    (folder, path)
}

fn record(path: &Path, cell: &[u64]) -> Result<WindRecord, FileError> {
    let mut file = Netcdf::open(path)?;
    let winds = file.winds()?;
    file.record(&winds.values, cell)
}

/// Toward 40° everywhere, faster by a tenth with each cell, and a value missing at time 2.
fn wind(t: usize, i: usize, j: usize) -> (f64, f64) {
    let speed = 5.0 + 0.1 * (10 * i + j) as f64 + t as f64;
    let (sin, cos) = 40f64.to_radians().sin_cos();
    if t == 2 { (f64::NAN, 1.0) } else { (speed * sin, speed * cos) }
}

const LATS: [f32; 3] = [31.0, 30.5, 30.0];
const LONS: [f32; 4] = [256.0, 256.5, 257.0, 257.5];

#[test]
fn every_variant_of_the_format_gives_the_same_cell() {
    for version in [1, 2, 5] {
        for recorded in [false, true] {
            let (_folder, path) = written(&grid(version, recorded, 6, &LATS, &LONS, wind).bytes());
            let winds = Netcdf::open(&path).and_then(|mut f| f.winds()).expect("winds");
            assert_eq!((winds.times, winds.cells.len()), (6, 12), "CDF-{version}, recorded {recorded}");
            assert_eq!(winds.cells[5].index, [1, 1]);
            assert_eq!(winds.cells[5].at, Some(LonLat { lon: 256.5 - 360.0, lat: 30.5 }));
            let record = record(&path, &[1, 1]).expect("a record");
            assert_eq!(record.samples.len(), 6);
            for (t, sample) in record.samples.iter().enumerate() {
                assert_eq!(sample.time, Some(NEW_YEAR_2001 + 3600 * t as i64));
                if t == 2 {
                    assert_eq!((sample.speed, sample.from), (None, None));
                    continue;
                }
                // Packed to 0.002 m/s.
                ventifact::assert_close!(
                    sample.speed.unwrap_or(f64::NAN),
                    6.1 + t as f64,
                    0.0015,
                    "speed at {t}"
                );
                let from = sample.from.map_or(f64::NAN, |a| a.deg());
                ventifact::assert_close!(from, 220.0, 0.02, "from, CDF-{version}, recorded {recorded}");
            }
        }
    }
}

#[test]
fn stations_have_names_and_a_lone_series_has_one_cell() {
    let station = |name: &'static str, values: Vec<f32>, units: &'static str, dims: Vec<usize>| Var {
        name,
        dims,
        attributes: vec![("units", text(units))],
        values: Numbers::Floats(values),
    };
    let time = || Var {
        name: "t",
        dims: vec![0],
        attributes: vec![("units", text("days since 2001-01-01"))],
        values: Numbers::Doubles(vec![0.0, 1.0]),
    };
    let stations = Layout {
        version: 1,
        records: 0,
        dims: vec![("t", 2), ("station", 2), ("letters", 4)],
        vars: vec![
            time(),
            Var {
                name: "name",
                dims: vec![1, 2],
                attributes: vec![],
                values: text("Fordheath".get(..8).unwrap()),
            },
            station("lon", vec![10.0, 20.0], "degrees_east", vec![1]),
            station("lat", vec![1.0, 2.0], "degrees_north", vec![1]),
            station("wind_speed", vec![1.0, 2.0, 3.0, 4.0], "knots", vec![0, 1]),
            station("wind_from_direction", vec![10.0, 20.0, 30.0, 400.0], "degree", vec![0, 1]),
        ],
    };
    let (_folder, path) = written(&stations.bytes());
    let winds = Netcdf::open(&path).and_then(|mut f| f.winds()).expect("winds");
    assert!(matches!(winds.values, GridWinds::Polar { .. }));
    let names: Vec<_> = winds.cells.iter().map(|c| (c.name.as_deref(), c.at)).collect();
    assert_eq!(names[0], (Some("Ford"), Some(LonLat { lon: 10.0, lat: 1.0 })));
    assert_eq!(names[1].0, Some("heat"));
    let second = record(&path, &[1]).expect("a record");
    ventifact::assert_close!(second.samples[1].speed.unwrap_or(0.0), 4.0 * 1852.0 / 3600.0, 1e-12, "4 knots");
    assert_eq!(second.samples[1].from, None, "400° is no direction");
    assert_eq!(second.samples[1].time, Some(NEW_YEAR_2001 + 86_400));

    let lone = Layout {
        version: 1,
        records: 0,
        dims: vec![("t", 2)],
        vars: vec![
            time(),
            station("u", vec![0.0, 3.0], "m/s", vec![0]),
            station("v", vec![-2.0, 4.0], "m/s", vec![0]),
        ],
    };
    let (_folder, path) = written(&lone.bytes());
    let alone = record(&path, &[]).expect("a record");
    assert_eq!(alone.samples[1].speed, Some(5.0));
    ventifact::assert_close!(
        alone.samples[0].from.map_or(f64::NAN, |a| a.deg()),
        0.0,
        1e-9,
        "southward is from north"
    );
}

#[test]
fn what_cannot_be_read_says_why() {
    let plain = || grid(2, true, 4, &LATS, &LONS, wind);
    let words = |layout: &Layout| {
        let (_folder, path) = written(&layout.bytes());
        record(&path, &[0, 0]).expect_err("refused").to_string()
    };
    let mut odd = plain();
    odd.vars[2].attributes[1].1 = text("noleap");
    assert!(words(&odd).contains("noleap"));
    let mut odd = plain();
    odd.vars[3].attributes[0].1 = text("Pa");
    assert!(words(&odd).contains("“pa”"));
    let mut odd = plain();
    odd.vars[3].attributes[1].1 = text("x_wind");
    assert!(words(&odd).contains("along the grid"));
    let mut odd = plain();
    odd.vars.truncate(4);
    assert!(words(&odd).contains("look like wind"));
    let mut odd = plain();
    odd.dims[1].0 = "member";
    odd.vars.remove(1);
    assert!(words(&odd).contains("further dimension “member” of 3"), "{}", words(&odd));
    let (_folder, path) = written(b"\x89HDF\r\n\x1a\n and so on");
    let hdf = Netcdf::open(&path).expect_err("refused").to_string();
    assert!(hdf.contains("HDF5") && hdf.contains("docs/winds.md"), "{hdf}");
}

#[test]
fn every_truncation_is_an_error_or_a_shorter_record() {
    let whole = grid(2, true, 3, &LATS[..2], &LONS[..2], wind).bytes();
    for length in 0..whole.len() {
        let (_folder, path) = written(&whole[..length]);
        assert!(record(&path, &[1, 1]).is_err(), "{length} of {} bytes", whole.len());
    }
}

#[test]
fn absurd_counts_are_refused_without_being_allocated() {
    let head = |version: u8, rest: &[u8]| [&[b'C', b'D', b'F', version][..], rest].concat();
    let huge = [0x7F, 0xFF, 0xFF, 0xFF];
    for bytes in [
        // Two thousand million dimensions, attributes, and letters in a name.
        head(1, &[&[0, 0, 0, 0, 0, 0, 0, 0x0A][..], &huge].concat()),
        head(1, &[&[0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0x0C][..], &huge].concat()),
        head(1, &[&[0, 0, 0, 0, 0, 0, 0, 0x0A, 0, 0, 0, 1][..], &huge].concat()),
        head(5, &[&[0; 8][..], &[0, 0, 0, 0x0A], &[0x7F], &[0xFF; 7]].concat()),
        head(5, &[&[0xFF; 8][..], &[0; 4]].concat()),
    ] {
        let (_folder, path) = written(&bytes);
        assert!(Netcdf::open(&path).is_err());
    }
    // A grid said to be as large as can be, and records without end, in a file of a few bytes.
    let mut layout = grid(2, true, 2, &LATS, &LONS, wind);
    layout.dims[1].1 = 0x7FFF_FFFF;
    let (_folder, path) = written(&layout.bytes());
    assert!(record(&path, &[0, 0]).is_err());
    let mut bytes = grid(2, true, 2, &LATS, &LONS, wind).bytes();
    bytes[4..8].copy_from_slice(&huge);
    let (_folder, path) = written(&bytes);
    let why = record(&path, &[0, 0]).expect_err("refused").to_string();
    assert!(why.contains("limit") || why.contains("more than the file"), "{why}");
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 400, ..ProptestConfig::default() })]

    /// Any bytes changed anywhere: an error or a record, never a panic.
    #[test]
    fn mutated_files_do_not_panic(version in 0usize..3, changes in prop::collection::vec((any::<prop::sample::Index>(), any::<u8>()), 1..6)) {
        let mut bytes = grid([1, 2, 5][version], true, 3, &LATS, &LONS, wind).bytes();
        for (at, value) in changes {
            // Most damage is of interest in the header.
            let end = if value % 3 == 0 { bytes.len() } else { 700.min(bytes.len()) };
            let place = at.index(end);
            bytes[place] = value;
        }
        let (_folder, path) = written(&bytes);
        let _ = record(&path, &[1, 1]);
    }
}

/// The same file through scipy's reader, where python3 has it.
#[test]
fn an_independent_reader_sees_the_same_values() {
    let (_folder, path) = written(&grid(2, true, 6, &LATS, &LONS, wind).bytes());
    let script = "import sys\nfrom scipy.io import netcdf_file\n\
                  f = netcdf_file(sys.argv[1], 'r', mmap=False, maskandscale=True)\n\
                  u, v, t = f.variables['u10'], f.variables['v10'], f.variables['time']\n\
                  print(u.shape, t.units.decode(), t[5])\n\
                  for i in range(6): print(float(u[i, 1, 1]) if i != 2 else 'nan', float(v[i, 1, 1]))";
    let run = Command::new("python3").arg("-c").arg(script).arg(&path).output();
    let Some(out) = run.ok().filter(|o| o.status.success()) else {
        eprintln!("skipped: python3 with scipy is not installed");
        return;
    };
    let printed = String::from_utf8_lossy(&out.stdout).into_owned();
    let mut lines = printed.lines();
    assert_eq!(lines.next(), Some("(6, 3, 4) hours since 2001-01-01 00:00:00.0 5"));
    let mine = record(&path, &[1, 1]).expect("a record");
    for (sample, line) in mine.samples.iter().zip(lines) {
        let theirs: Vec<f64> = line.split(' ').filter_map(|n| n.parse().ok()).collect();
        if let (Some(speed), [u, v]) = (sample.speed, theirs.as_slice()) {
            ventifact::assert_close!(speed, u.hypot(*v), 1e-9, "{line}");
        }
    }
}
