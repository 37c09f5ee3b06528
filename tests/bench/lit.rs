//! Ground under a known light, on a sheet of its own.

use std::path::PathBuf;

use ventifact::files::raster::{Bands, write_tiff};
use ventifact::ground::{Axis, Azimuth, Grid, LocalFrame, Polygon, Seed, Work};
use ventifact::science::scene::inject::Bedforms;
use ventifact::science::scene::speckle;
use ventifact::study::run::{Memo, run_patch, run_recovery};
use ventifact::study::window::Detail;
use ventifact::study::{
    Id, ImageKind, Patch, PatchFinding, Placement, RasterEntry, RecoveryFinding, Sheet, Sources, Tone,
};

/// North up, one unit a pixel.
pub const PLAIN: LocalFrame =
    LocalFrame { east_per_col: 1.0, east_per_row: 0.0, north_per_col: 0.0, north_per_row: -1.0 };

/// A raster written to a folder of its own, with a patch that covers it.
pub struct Lit {
    pub sheet: Sheet,
    folder: tempfile::TempDir,
}

impl Lit {
    pub fn new(picture: &Grid<f32>, kind: ImageKind, light: Azimuth) -> Self {
        let folder = tempfile::tempdir().expect("a folder");
        let mut lit = Self { sheet: Sheet::empty("lit"), folder };
        let path = lit.write(picture);
        lit.sheet.rasters.push(RasterEntry {
            id: Id(1),
            name: "lit".into(),
            path,
            bands: Bands::default(),
            kind,
            placement: Placement::default(),
            tone: Tone::default(),
            light_from: Some(light),
        });
        let whole = Polygon::rectangle(picture.width() as f64, picture.height() as f64);
        lit.sheet.patches.push(Patch::new(Id(2), "lit", Id(1), whole));
        lit.sheet.settings.statistics.resamples = 200;
        lit
    }

    fn write(&self, picture: &Grid<f32>) -> PathBuf {
        let path = self.folder.path().join("lit.tif");
        write_tiff(&path, picture, None).expect("a raster");
        path
    }

    pub fn measure(&self) -> PatchFinding {
        let sources = Sources::open(&self.sheet);
        let found =
            run_patch(&self.sheet, &sources, Id(2), &[], Detail::Exact, &Memo::default(), &Work::quiet());
        (*found.expect("not stopped").expect("a finding")).clone()
    }

    pub fn recover(&self) -> RecoveryFinding {
        let sources = Sources::open(&self.sheet);
        let found = run_recovery(&self.sheet, &sources, Id(2), &[], &Memo::default(), &Work::quiet());
        (*found.expect("not stopped").expect("a recovery")).clone()
    }
}

/// Intensity of bedforms of random crests under a light, through speckle of four looks; `strength` is the
/// standard deviation of ln I that bedforms right across the light would have.
pub fn speckled_bedforms(
    side: usize,
    bedforms: Bedforms,
    light: Azimuth,
    strength: f64,
    seed: u64,
) -> Grid<f32> {
    let lay = |trend: Axis| {
        let mut rng = Seed(seed).stream("lit.bedforms", 0);
        let laid =
            Bedforms { trend, ..bedforms }.lay([side, side], PLAIN, Some(light), &mut rng, &Work::quiet());
        laid.expect("not stopped").slope
    };
    let across = lay(light.axis().perpendicular());
    let square = across.values().iter().map(|v| f64::from(*v).powi(2)).sum::<f64>() / across.len() as f64;
    let tone = (strength / square.sqrt()) as f32;
    let slope = lay(bedforms.trend);
    let grain = speckle(side, side, 4.0, &mut Seed(seed).stream("lit.speckle", 0));
    Grid::from_fn(side, side, |col, row| 100.0 * (tone * slope.at(col, row)).exp() * grain.at(col, row))
}
