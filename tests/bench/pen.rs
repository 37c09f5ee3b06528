//! How soon does the pen answer? Picks a thousand pixels apart on screens of three sizes, front and way
//! computed anew each time; and the same task as general tools do it.
//!
//! `cargo bench --bench pen` prints medians and the worst of all picks, time on the processor; the goal is 50 ms. With
//! `PEERS_DATA` (holding `cost2048.npy`), `PEERS` (holding `t7.py`) and `PEERS_PYTHON` set it runs the quickest
//! general tool on the same costs beside our own, one thread each, by turns; the goal is 0.20 of its time.

use std::f64::consts::TAU;
use std::path::Path;
use std::process::Command;
use std::sync::Arc;
use std::time::Instant;

use rand::Rng as _;

use ventifact::ground::{Grid, Point, Seed, Work};
use ventifact::numeric::least_path::CostField;
use ventifact::science::channel::detect::ChannelTone;
use ventifact::science::channel::pen::ground;
use ventifact::science::crest::{CrestModel, Pen};

const PICKS: usize = 60;

/// Winding dark channels of several widths under noise; `depth` 0 is noise alone.
fn screen(width: usize, height: usize, depth: f64) -> Grid<f32> {
    let mut rng = Seed(3).stream("screen", 0);
    Grid::from_fn(width, height, |c, r| {
        let (x, y) = (c as f64, r as f64);
        let inside = (0..5).any(|k| {
            let bend = 60.0 + 10.0 * f64::from(k);
            let middle = height as f64 * (0.1 + 0.2 * f64::from(k)) + 40.0 * (x / bend).sin();
            let slope = 40.0 / bend * (x / bend).cos();
            (y - middle).abs() / 1.0f64.hypot(slope) < 2.0 + f64::from(k)
        });
        let noise = 20.0 * (rng.random::<f64>() + rng.random::<f64>() - 1.0);
        (100.0 + noise - if inside { depth } else { 0.0 }) as f32
    })
}

fn milliseconds(mut times: Vec<f64>) -> String {
    times.sort_by(f64::total_cmp);
    let last = times.len() - 1;
    format!("median {:.1} ms, worst {:.1} ms of {}", 1e3 * times[last / 2], 1e3 * times[last], last + 1)
}

/// Seconds this thread has run, where the system tells: a busy machine does not count then.
fn on_processor() -> Option<f64> {
    let text = std::fs::read_to_string("/proc/thread-self/schedstat").ok()?;
    Some(text.split_whitespace().next()?.parse::<f64>().ok()? * 1e-9)
}

/// Seconds on the processor, or by the clock where that is not known.
fn timed<T>(f: impl FnOnce() -> T) -> (T, f64) {
    let (start, before) = (Instant::now(), on_processor());
    let value = f();
    let clock = start.elapsed().as_secs_f64();
    (value, on_processor().zip(before).map_or(clock, |(after, before)| after - before))
}

fn response() {
    let work = Work::quiet();
    for (width, height) in [(1280, 720), (1600, 1000), (2000, 1500)] {
        for (what, depth) in [("channels", 40.0), ("noise", 0.0)] {
            let picture = screen(width, height, depth);
            let (ground, laid) =
                timed(|| ground(&picture, ChannelTone::Dark, [2.0, 40.0], &work).expect("not stopped"));
            let ground = Arc::new(ground);
            let mut rng = Seed(5).stream("picks", 0);
            let (mut ways, mut fronts, mut live) = (Vec::new(), Vec::new(), Vec::new());
            while ways.len() < PICKS {
                let from =
                    Point::new(rng.random::<f64>() * width as f64, rng.random::<f64>() * height as f64);
                let (sin, cos) = (TAU * rng.random::<f64>()).sin_cos();
                let to = Point::new(from.x + 1000.0 * cos, from.y + 1000.0 * sin);
                if !(to.x > 0.0 && to.y > 0.0 && to.x < width as f64 && to.y < height as f64) {
                    continue;
                }
                let (way, time) = timed(|| ground.way(from, to, &work));
                assert!(way.expect("not stopped").is_some());
                ways.push(time);
                let (front, time) = timed(|| ground.ways_from(from, &work));
                fronts.push(time);
                let front = front.expect("not stopped").expect("passable");
                live.push(timed(|| front.to(to, &work)).1);
            }
            println!("{width} × {height}, {what}: ground laid in {:.0} ms (one of the threads)", 1e3 * laid);
            println!("  way between two picks: {} (goal 50)", milliseconds(ways));
            println!("  all ways from a pick: {}", milliseconds(fronts));
            println!("  then the way to a pointer: {}", milliseconds(live));
        }
    }
}

/// Winding crests 30 px apart: the pen of crests, the same picks.
fn along_crests() {
    let work = Work::quiet();
    let (width, height) = (2000, 1500);
    let mut rng = Seed(7).stream("crests", 0);
    let picture = Grid::from_fn(width, height, |c, r| {
        let phase = (r as f64 + 20.0 * (c as f64 / 100.0).sin()) / 30.0;
        ((TAU * phase).cos().max(0.0) + rng.random::<f64>()) as f32
    });
    let (pen, laid) = timed(|| {
        Pen::of(&picture, Some(CrestModel::BrightRidge), Some(4.3), false, &work).expect("not stopped")
    });
    let (mut ways, mut fronts, mut live) = (Vec::new(), Vec::new(), Vec::new());
    while ways.len() < PICKS {
        let x = rng.random::<f64>() * 1000.0;
        let (y, turn) = (rng.random::<f64>() * 1500.0, 1.2 * (rng.random::<f64>() - 0.5));
        let (from, to) = (Point::new(x, y), Point::new(x + 1000.0 * turn.cos(), y + 1000.0 * turn.sin()));
        if !(0.0..height as f64).contains(&to.y) {
            continue;
        }
        let [from, to] = [from, to].map(|p| pen.snapped(p));
        let (way, time) = timed(|| pen.field().way(from, to, &work).map(|way| way.map(|way| pen.line(&way))));
        assert!(way.expect("not stopped").is_some());
        ways.push(time);
        let (front, time) = timed(|| pen.field().ways_from(from, &work));
        fronts.push(time);
        let front = front.expect("not stopped").expect("passable");
        live.push(timed(|| front.to(to, &work).map(|way| way.map(|way| pen.line(&way)))).1);
    }
    println!("{width} × {height}, crests: ground laid in {:.0} ms (one of the threads)", 1e3 * laid);
    println!("  way between two picks: {} (goal 100)", milliseconds(ways));
    println!("  all ways from a pick: {}", milliseconds(fronts));
    println!("  then the way to a pointer: {}", milliseconds(live));
}

/// Values of a two-dimensional little-endian f32 .npy file.
fn read_npy(path: &Path, side: usize) -> Option<Vec<f32>> {
    let bytes = std::fs::read(path).ok()?;
    let values = bytes.get(bytes.len().checked_sub(4 * side * side)?..)?;
    Some(values.chunks_exact(4).map(|b| f32::from_le_bytes([b[0], b[1], b[2], b[3]])).collect())
}

fn peers() {
    let set = |name: &str| std::env::var(name).ok();
    let (Some(data), Some(folder), Some(python)) = (set("PEERS_DATA"), set("PEERS"), set("PEERS_PYTHON"))
    else {
        println!("general tools: not run (PEERS_DATA, PEERS and PEERS_PYTHON tell where they are)");
        return;
    };
    let side = 2048;
    let Some(costs) = read_npy(&Path::new(&data).join("cost2048.npy"), side) else {
        println!("general tools: no cost2048.npy in {data}");
        return;
    };
    let pool = rayon::ThreadPoolBuilder::new().num_threads(1).build().expect("a thread");
    let corner =
        |share: f64| Point::new((share * side as f64).floor() + 0.5, (share * side as f64).floor() + 0.5);
    let mut ratios = Vec::new();
    for _ in 0..5 {
        let (way, own) = pool.install(|| {
            timed(|| CostField::new(side, side, &costs).way(corner(0.1), corner(0.9), &Work::quiet()))
        });
        let way = way.expect("not stopped").expect("a way");
        let output = Command::new(&python)
            .current_dir(&folder)
            .env("PEERS_DATA", &data)
            .env("PEERS_RESULTS", std::env::temp_dir().join("peers-results.jsonl"))
            .env("QWAIT", "0")
            .args(["t7.py", "numba_dijkstra", "2048", "1", "3"])
            .output()
            .expect("the tool runs");
        let text = String::from_utf8_lossy(&output.stdout);
        let field = |name: &str| -> Option<f64> {
            let at = text.find(&format!("\"{name}\": "))? + name.len() + 4;
            text[at..].split([',', '}']).next()?.trim().parse().ok()
        };
        let (Some(cpu), Some(cost)) = (field("cpu"), field("cost")) else {
            println!("general tools: {text}{}", String::from_utf8_lossy(&output.stderr));
            return;
        };
        println!(
            "4.2 million costs: {own:.3} s, cost {:.1}; numba Dijkstra {cpu:.3} s, cost {cost:.1}; ratio {:.3}",
            way.cost,
            own / cpu
        );
        ratios.push(own / cpu);
    }
    ratios.sort_by(f64::total_cmp);
    println!("ratio: median {:.3} (goal 0.20)", ratios[ratios.len() / 2]);
}

fn main() {
    response();
    along_crests();
    peers();
}
