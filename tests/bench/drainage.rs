//! Filling, and directions with contributing area, on 16.8 million cells: CPU time and memory.
//!
//! `cargo bench --bench drainage` prints CPU seconds (user + system, one thread) and the peak of memory above the
//! raster given. With `PEERS_DATA` (a folder with `dem4096.npy`), `PEERS_SCRIPTS` (the folder of `t4.py`) and
//! `PEERS_PYTHON` set, the general-purpose peers run in turn with ours on the same terrain, and the ratios are
//! printed; otherwise on terrain of our own, and it says so.

use std::fs;
use std::path::{Path, PathBuf};
use std::process::Command;

use ventifact::ground::{Grid, Work};
use ventifact::science::drainage::accumulate::area;
use ventifact::science::drainage::cells::Cells;
use ventifact::science::drainage::condition::{BreachLimits, Conditioned, Conditioning, condition};
use ventifact::science::drainage::d8::receivers;
use ventifact::science::drainage::routing::Router;

const SIDE: usize = 4096;
const ROUNDS: usize = 5;

fn main() {
    let mut args = std::env::args().skip(1).filter(|a| a != "--bench");
    if let Some(job) = args.next() {
        return run_job(&job);
    }
    let peers = Peers::find();
    if peers.is_none() {
        println!(
            "no peers here (PEERS_DATA, PEERS_SCRIPTS, PEERS_PYTHON): our figures alone, on our own terrain"
        );
    }
    // Ours, then the peer of the same job.
    for (job, peer, goal) in
        [("fill", "numba_fill", 4.0), ("fill-sloped", "numba_fill", 4.0), ("d8", "d8", 2.0)]
    {
        let (mut ours, mut theirs, mut memory) = (Vec::new(), Vec::new(), 0.0f64);
        for _ in 0..ROUNDS {
            let (cpu, peak) = our_turn(job);
            ours.push(cpu);
            memory = memory.max(peak);
            theirs.extend(peers.as_ref().and_then(|p| p.turn(peer)));
        }
        let raster = (4 * SIDE * SIDE) as f64 / f64::from(1 << 20);
        print!("{job}: {:.3} s CPU (least {:.3}), ", middle(&mut ours), ours[0]);
        print!("peak {memory:.0} MiB above the raster = {:.2} rasters", memory / raster);
        if !theirs.is_empty() {
            let (ours, theirs) = (middle(&mut ours), middle(&mut theirs));
            print!("; {peer} {theirs:.3} s: {:.2} times ours (goal {goal})", theirs / ours);
        }
        println!();
    }
}

fn middle(values: &mut [f64]) -> f64 {
    values.sort_by(f64::total_cmp);
    values[values.len() / 2]
}

/// CPU seconds and peak MiB of one job in a process of its own.
fn our_turn(job: &str) -> (f64, f64) {
    let exe = std::env::current_exe().expect("this program");
    let output = Command::new(exe).arg(job).env("RAYON_NUM_THREADS", "1").output().expect("a run");
    let text = String::from_utf8_lossy(&output.stdout).into_owned();
    let mut words = text.split_whitespace().filter_map(|w| w.parse::<f64>().ok());
    match (words.next(), words.next()) {
        (Some(cpu), Some(peak)) => (cpu, peak),
        _ => panic!("{job}: {text} {}", String::from_utf8_lossy(&output.stderr)),
    }
}

struct Peers {
    python: PathBuf,
    scripts: PathBuf,
    data: PathBuf,
}

impl Peers {
    fn find() -> Option<Self> {
        let path = |name: &str| std::env::var_os(name).map(PathBuf::from);
        Some(Self {
            python: path("PEERS_PYTHON")?,
            scripts: path("PEERS_SCRIPTS")?,
            data: path("PEERS_DATA").filter(|d| d.join("dem4096.npy").is_file())?,
        })
    }

    /// CPU seconds of one run of a peer, as its script prints them.
    fn turn(&self, peer: &str) -> Option<f64> {
        let output = Command::new(&self.python)
            .arg(self.scripts.join("t4.py"))
            .args([peer, "4096", "1", "1"])
            .env("PEERS_DATA", &self.data)
            .env("PEERS_RESULTS", self.data.join("results.jsonl"))
            .env("QWAIT", "0")
            .output()
            .ok()?;
        let text = String::from_utf8_lossy(&output.stdout).into_owned();
        let number = text.split("\"cpu\": ").nth(1)?.split(',').next()?;
        number.trim().parse().ok()
    }
}

/// Does one job and prints its CPU seconds and peak MiB.
fn run_job(job: &str) {
    let elevation = terrain();
    let cells = Cells::square(30.0, SIDE);
    let quiet = Work::quiet();
    let limits = BreachLimits { depth_m: 20.0, cells: 50 };
    let how = if job == "fill" { Conditioning::Fill } else { Conditioning::FillSloped };
    // One small round first, so that threads and code are there.
    let small = Grid::from_fn(64, 64, |col, row| elevation.at(col, row));
    round(&small, &Cells::square(30.0, 64), how);
    if job == "d8" {
        let surface = condition(&elevation, &cells, how, limits, &[], &quiet).expect("not stopped");
        drop(elevation);
        let (cpu, peak, out) = measured(|| drain(&surface, &cells));
        assert!(out > 0.0);
        println!("{cpu} {peak}");
    } else {
        let (cpu, peak, surface) =
            measured(|| condition(&elevation, &cells, how, limits, &[], &quiet).expect("not stopped"));
        assert!(surface.changed.raised_cells > 0);
        println!("{cpu} {peak}");
    }
}

fn round(elevation: &Grid<f32>, cells: &Cells, how: Conditioning) {
    let limits = BreachLimits { depth_m: 20.0, cells: 50 };
    let surface = condition(elevation, cells, how, limits, &[], &Work::quiet()).expect("not stopped");
    drain(&surface, cells);
}

/// Directions and area; the greatest area.
fn drain(surface: &Conditioned, cells: &Cells) -> f64 {
    let receivers = receivers(surface, cells, &Work::quiet()).expect("not stopped");
    let area = area(surface, cells, Router::D8, &receivers, &Work::quiet()).expect("not stopped");
    area.at(SIDE.min(surface.surface.width()) / 2, 0)
}

/// CPU seconds and the peak of memory above what was there before, MiB.
fn measured<T>(job: impl FnOnce() -> T) -> (f64, f64, T) {
    // Forget the peak so far.
    let _ = fs::write("/proc/self/clear_refs", "5");
    let (before, from) = (memory("VmRSS"), cpu_seconds());
    let made = job();
    let cpu = cpu_seconds() - from;
    (cpu, memory("VmHWM") - before, made)
}

/// On-CPU time of all threads.
fn cpu_seconds() -> f64 {
    let tasks = fs::read_dir("/proc/self/task").expect("/proc");
    let spent = |path: &Path| -> Option<f64> {
        fs::read_to_string(path.join("schedstat")).ok()?.split_whitespace().next()?.parse().ok()
    };
    1e-9 * tasks.flatten().filter_map(|task| spent(&task.path())).sum::<f64>()
}

/// MiB of a line of /proc/self/status.
fn memory(name: &str) -> f64 {
    let status = fs::read_to_string("/proc/self/status").expect("/proc");
    let line = status.lines().find(|l| l.starts_with(name)).expect("a line");
    line.split_whitespace().nth(1).and_then(|kib| kib.parse::<f64>().ok()).expect("KiB") / 1024.0
}

/// The peers' terrain, or midpoint displacement of about the same roughness.
fn terrain() -> Grid<f32> {
    let file = std::env::var_os("PEERS_DATA").map(|d| PathBuf::from(d).join("dem4096.npy"));
    if let Some(bytes) = file.and_then(|f| fs::read(f).ok()) {
        let values = bytes[128..].chunks_exact(4).map(|b| f32::from_le_bytes([b[0], b[1], b[2], b[3]]));
        return Grid::from_parts(SIDE, SIDE, values.collect(), None);
    }
    let mut state = 5u64;
    let mut random = move || {
        state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (state >> 40) as f32 / (1u64 << 24) as f32 - 0.5
    };
    // On a torus: each round doubles the grid and adds noise that shrinks with it.
    let mut z = vec![0.0f32];
    let (mut side, mut height) = (1, 400.0);
    while side < SIDE {
        let old = |col: usize, row: usize| z[(row % side) * side + col % side];
        let mut next = Vec::with_capacity(4 * z.len());
        for row in 0..2 * side {
            for col in 0..2 * side {
                let (c, r) = (col / 2, row / 2);
                let (c2, r2) = (c + col % 2, r + row % 2);
                let middle = 0.25 * (old(c, r) + old(c2, r) + old(c, r2) + old(c2, r2));
                next.push(middle + height * random());
            }
        }
        z = next;
        side *= 2;
        height *= 0.57;
    }
    Grid::from_parts(SIDE, SIDE, z, None)
}
