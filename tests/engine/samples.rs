//! `sample-rasters/` holds what the scene makes: `UPDATE_SAMPLES=1 cargo test --test engine samples`
//! writes it anew.

use std::fs;
use std::path::Path;

use ventifact::files::raster::{Bands, Limits, Raster, Window};
use ventifact::ground::{Grid, Work};
use ventifact::study::demo;

fn pixels(path: &Path) -> Grid<f32> {
    let raster = Raster::open(path, &Limits::default()).unwrap();
    let info = raster.info();
    let window = Window { col: 0, row: 0, width: info.width, height: info.height };
    raster.read(0, window, &Bands::default(), &Work::quiet()).unwrap()
}

/// Another machine's sine may differ in the last bit, which rounding to whole tones can turn into one.
const ONE_TONE: f32 = 1.0;

#[test]
fn the_sample_files_are_what_the_scene_makes() {
    let shipped = Path::new(env!("CARGO_MANIFEST_DIR")).join("sample-rasters");
    let folder = tempfile::tempdir().unwrap();
    demo::lay_out(folder.path()).unwrap();
    for name in [demo::MOSAIC, demo::ELEVATION] {
        if std::env::var_os("UPDATE_SAMPLES").is_some() {
            fs::copy(folder.path().join(name), shipped.join(name)).unwrap();
        }
        let (want, got) = (pixels(&folder.path().join(name)), pixels(&shipped.join(name)));
        assert_eq!((got.width(), got.height()), (want.width(), want.height()), "{name}");
        assert_eq!(got.mask(), want.mask(), "{name}");
        let far =
            got.valid_values().zip(want.valid_values()).filter(|(a, b)| (a - b).abs() > ONE_TONE).count();
        assert_eq!(far, 0, "{name}: {far} pixels differ; UPDATE_SAMPLES=1 writes them anew");
    }
    for (name, record) in demo::records() {
        let want = demo::csv(&record);
        if std::env::var_os("UPDATE_SAMPLES").is_some() {
            fs::write(shipped.join(name), &want).unwrap();
        }
        assert!(fs::read_to_string(shipped.join(name)).unwrap() == want, "{name} is out of date");
    }
}
