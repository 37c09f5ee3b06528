//! What lasts only while the window is open and can always be rebuilt.

use std::collections::BTreeMap;
use std::path::PathBuf;
use std::sync::Arc;

use crate::ground::{Place, Point, Polygon};
use crate::study::{Id, OpenRaster, Sheet, fingerprint};

use super::comparing::Comparing;
use super::laying::OpenedAs;
use super::measuring::{Kept, Task};
use super::recovering::Recovering;
use super::{
    Answer, Command, History, Import, Jobs, Notices, PenGround, Preview, Results, Slot, TileShelf, Tracing,
    Wake,
};

/// Never saved.
#[derive(Debug)]
pub struct Session {
    /// Where the sheet is saved; `None` until it is.
    pub path: Option<PathBuf>,
    /// The sheet as it is on disk (or as it was new).
    pub saved: Sheet,
    pub history: History,
    pub results: Results,
    pub jobs: Jobs<Answer>,
    /// What came of opening each raster of the sheet.
    pub rasters: BTreeMap<Id, Opened>,
    /// The open files, for measuring.
    pub sources: BTreeMap<Id, OpenRaster>,
    /// What each raster was opened as.
    pub(super) opened_as: BTreeMap<Id, OpenedAs>,
    pub(super) kept: Arc<Kept>,
    /// What the measuring job is about.
    pub(super) measuring: Option<Task>,
    /// Fingerprint of the patches and winds at which the user stopped measuring.
    pub(super) stopped_at: Option<String>,
    /// The fingerprints of the networks that the running job measures, and of those at which the user stopped it.
    pub(super) charting: Vec<String>,
    pub(super) charts_stopped_at: Option<Vec<String>>,
    /// What the recovery job is about.
    pub(super) recovering: Recovering,
    /// What the comparing job is about.
    pub(super) comparing: Comparing,
    /// Whether patches are measured as they change.
    pub measures: bool,
    /// The plate on the bench.
    pub preview: Preview,
    /// The wind file in the preview.
    pub import: Option<Import>,
    pub notices: Notices,
    pub tool: Tool,
    /// The outline under way.
    pub draft: Option<Draft>,
    /// The channel or crest under way.
    pub tracing: Option<Tracing>,
    pub(super) pen_ground: Option<PenGround>,
    /// Where the pointer (or the keyboard cross) is on the raster.
    pub cursor: Option<Cursor>,
    /// Size of the table in screen points, as last drawn.
    pub viewport: [f64; 2],
    pub dialog: Option<Dialog>,
    /// A path is wanted from the user.
    pub ask: Option<Ask>,
    /// What goes on once the sheet is saved.
    pub after_save: Option<Box<Command>>,
    /// Sheets opened or saved lately, latest first.
    pub recent: Vec<PathBuf>,
    /// Whether that list is written down for the next session.
    pub keeps_recent: bool,
    /// Set when the window may close.
    pub leaving: bool,
}

/// What came of opening a raster.
#[derive(Debug)]
pub enum Opened {
    Opening,
    Open(Box<Laid>),
    /// Why it cannot be opened, in words.
    Failed(String),
}

/// An open raster.
#[derive(Debug)]
pub struct Laid {
    /// Width and height, full-resolution pixels.
    pub size: [usize; 2],
    pub place: Place,
    /// Its pixels, for the table.
    pub tiles: TileShelf,
}

/// What the pointer does on the table.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Tool {
    /// Moves the raster and selects patches.
    #[default]
    Hand,
    Polygon,
    Rectangle,
    Ellipse,
    /// A hole in the selected patch.
    Hole,
    /// Moves, adds and removes the corners of the selected patch.
    Corners,
    /// Corners of an outcrop.
    Outcrop,
    /// One click: where the selected network ends.
    Outlet,
    /// Corners of a lake or basin that stays closed.
    Lake,
    /// Follows a channel from pick to pick.
    Pen,
    /// One click: a proposed reach that is none.
    Strike,
    /// Two clicks: the water went this way.
    Arrow,
    /// Draws a crest from pick to pick, or lengthens one from its end.
    Ridge,
    /// Two clicks: from the end of one crest to the end of another.
    Join,
    /// One click: where a crest is cut in two.
    Cut,
    /// One click: a traced line that is no crest.
    Reject,
    /// One click: a traced line that was looked at and stands.
    Accept,
    /// Corners of ground that is no bedform.
    Mask,
}

/// An outline under way.
#[derive(Clone, Debug, PartialEq)]
pub struct Draft {
    pub tool: Tool,
    pub raster: Id,
    /// Full-resolution pixel coordinates.
    pub points: Vec<Point>,
}

#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Cursor {
    pub raster: Id,
    /// Full-resolution pixel coordinates.
    pub pixel: Point,
}

/// The one thing that lies over the window.
#[derive(Clone, Debug, PartialEq)]
pub enum Dialog {
    Finder,
    Keys,
    Settings,
    /// The bodies of the sheet.
    Bodies,
    /// The sheet has changes that would be lost by this command.
    Unsaved(Box<Command>),
}

/// A path is wanted.
#[derive(Clone, Debug, PartialEq)]
pub struct Ask {
    pub purpose: Purpose,
    /// File name offered when saving.
    pub suggested: String,
    /// Whether the in-window field is shown instead of the system's dialog.
    pub typed: bool,
}

/// What the path is for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Purpose {
    OpenSheet,
    SaveSheet,
    OpenRaster,
    ImportWinds,
    BringPatches,
    ImportCrests,
    ExportPlate,
    /// A folder for everything.
    HandOver,
}

impl Ask {
    pub fn new(purpose: Purpose, suggested: impl Into<String>) -> Self {
        Self { purpose, suggested: suggested.into(), typed: false }
    }
}

impl Purpose {
    pub fn title(self) -> &'static str {
        match self {
            Self::OpenSheet => "Open sheet",
            Self::SaveSheet => "Save sheet as",
            Self::OpenRaster => "Open raster",
            Self::ImportWinds => "Import winds",
            Self::BringPatches => "Bring in patches",
            Self::ImportCrests => "Import crests",
            Self::ExportPlate => "Export plate",
            Self::HandOver => "Hand everything over",
        }
    }

    pub fn hint(self) -> &'static str {
        match self {
            Self::OpenSheet => "A saved sheet, NAME.sheet.json.",
            Self::SaveSheet => "The sheet is written as NAME.sheet.json; rasters stay where they are.",
            Self::ImportWinds => "A time series (CSV or blanks) or a table of sectors and speed classes.",
            Self::BringPatches => "GeoPackage, or GeoJSON whose \"frame\" says what its numbers are.",
            Self::ImportCrests => {
                "Lines of a GeoPackage, or of GeoJSON whose \"frame\" says what its numbers are."
            }
            Self::ExportPlate => "The ending is that of the chosen format when left out.",
            Self::HandOver => "A folder; files of the same names in it are replaced.",
            Self::OpenRaster => "GeoTIFF, TIFF, PNG or JPEG; a world file beside it is read too.",
        }
    }

    /// What the button says.
    pub fn verb(self) -> &'static str {
        match self {
            Self::OpenSheet | Self::OpenRaster | Self::BringPatches => "Open",
            Self::ImportWinds | Self::ImportCrests => "Read",
            Self::SaveSheet => "Save",
            Self::ExportPlate | Self::HandOver => "Write",
        }
    }

    /// Whether the path may be new.
    pub fn saves(self) -> bool {
        matches!(self, Self::SaveSheet | Self::ExportPlate)
    }

    pub fn is_folder(self) -> bool {
        self == Self::HandOver
    }

    /// Names and endings of the files that fit.
    pub fn filters(self) -> &'static [(&'static str, &'static [&'static str])] {
        match self {
            Self::OpenSheet | Self::SaveSheet => &[("Sheets", &["json"])],
            Self::BringPatches => &[("Outlines", &["gpkg", "geojson", "json"])],
            Self::ImportCrests => &[("Lines", &["gpkg", "geojson", "json"])],
            Self::ExportPlate => &[("Figures", &["svg", "png", "pdf"])],
            Self::HandOver => &[],
            Self::ImportWinds => &[("Tables", &["csv", "txt", "dat", "tsv"]), ("All files", &["*"])],
            Self::OpenRaster => &[("Rasters", &["tif", "tiff", "png", "jpg", "jpeg"]), ("All files", &["*"])],
        }
    }
}

impl Session {
    /// Drops every result and all that was kept for the next one.
    pub(super) fn forget_measured(&mut self) {
        self.results = Results::default();
        self.kept = Arc::default();
        self.measuring = None;
        self.stopped_at = None;
        self.charts_stopped_at = None;
        self.recovering = Recovering::default();
        self.comparing = Comparing::default();
    }

    /// Measures nothing more until the sheet changes or the user asks.
    pub(super) fn pause_measuring(&mut self, sheet: &Sheet) {
        self.stopped_at = Some(fingerprint::of_patches(sheet));
    }

    /// Measures no network until the sheet changes or the user asks.
    pub(super) fn pause_charting(&mut self) {
        self.charts_stopped_at = Some(std::mem::take(&mut self.charting));
    }

    /// Whether something lies over the window and has the keyboard.
    pub fn is_covered(&self) -> bool {
        self.dialog.is_some() || self.ask.is_some() || self.import.is_some()
    }

    /// Another sheet begins: jobs of the old one are dropped, notices and recent sheets stay.
    pub fn start_over(&mut self, sheet: &Sheet, path: Option<PathBuf>) {
        Slot::ALL.into_iter().for_each(|slot| self.jobs.abandon(slot));
        self.path = path;
        self.saved = sheet.clone();
        self.history = History::default();
        self.rasters.clear();
        self.sources.clear();
        self.opened_as.clear();
        self.forget_measured();
        self.import = None;
        self.preview = Preview::default();
        self.tool = Tool::default();
        self.draft = None;
        self.tracing = None;
        self.pen_ground = None;
        self.cursor = None;
        self.dialog = None;
        self.ask = None;
        self.after_save = None;
    }

    /// Nothing open, nothing running, `sheet` as on disk.
    pub fn new(sheet: &Sheet, wake: Wake) -> Self {
        Self {
            path: None,
            saved: sheet.clone(),
            history: History::default(),
            results: Results::default(),
            jobs: Jobs::new(wake),
            rasters: BTreeMap::new(),
            sources: BTreeMap::new(),
            opened_as: BTreeMap::new(),
            kept: Arc::default(),
            measuring: None,
            stopped_at: None,
            charting: Vec::new(),
            charts_stopped_at: None,
            recovering: Recovering::default(),
            comparing: Comparing::default(),
            measures: true,
            preview: Preview::default(),
            import: None,
            notices: Notices::default(),
            tool: Tool::default(),
            draft: None,
            tracing: None,
            pen_ground: None,
            cursor: None,
            viewport: [0.0, 0.0],
            dialog: None,
            ask: None,
            after_save: None,
            recent: Vec::new(),
            keeps_recent: false,
            leaving: false,
        }
    }
}

impl Opened {
    /// Width and height, once open.
    pub fn size(&self) -> Option<[usize; 2]> {
        self.laid().map(|laid| laid.size)
    }

    pub fn laid(&self) -> Option<&Laid> {
        match self {
            Self::Open(laid) => Some(laid),
            Self::Opening | Self::Failed(_) => None,
        }
    }
}

impl Tool {
    /// For patches and outcrops.
    pub const OUTLINING: [Self; 7] =
        [Self::Hand, Self::Polygon, Self::Rectangle, Self::Ellipse, Self::Hole, Self::Corners, Self::Outcrop];
    /// For networks from elevation, and for those on images.
    pub const DRAINAGE: [Self; 2] = [Self::Outlet, Self::Lake];
    pub const CHANNELS: [Self; 3] = [Self::Pen, Self::Strike, Self::Arrow];
    /// For the crests of the selected patch.
    pub const CRESTS: [Self; 6] =
        [Self::Ridge, Self::Join, Self::Cut, Self::Reject, Self::Accept, Self::Mask];

    /// Whether the tool lays down points.
    pub fn draws(self) -> bool {
        !matches!(self, Self::Hand | Self::Corners)
    }

    /// Whether two points make the whole of it.
    pub fn takes_two(self) -> bool {
        matches!(self, Self::Rectangle | Self::Ellipse | Self::Arrow)
    }

    /// Whether each point does something by itself.
    pub fn takes_one(self) -> bool {
        matches!(self, Self::Outlet | Self::Strike | Self::Cut | Self::Reject | Self::Accept)
    }

    /// Whether the pen finds the way between its points.
    pub fn traces(self) -> bool {
        matches!(self, Self::Pen | Self::Ridge | Self::Join)
    }
}

impl Draft {
    /// The ring as it would be with `next` (the pointer) as its last point; empty when there is
    /// not yet anything to show.
    pub fn ring(&self, next: Option<Point>) -> Vec<Point> {
        let points: Vec<Point> = self.points.iter().copied().chain(next).collect();
        match (self.tool, points.as_slice()) {
            (Tool::Rectangle, [a, .., b]) => {
                vec![*a, Point::new(b.x, a.y), *b, Point::new(a.x, b.y)]
            }
            (Tool::Ellipse, [a, .., b]) => ellipse(*a, *b),
            _ => points,
        }
    }

    /// The finished ring, when it encloses any ground; an arrow's two ends.
    pub fn finished(&self) -> Option<Vec<Point>> {
        let mut ring = self.ring(None);
        ring.dedup();
        if self.tool == Tool::Arrow {
            return (ring.len() == 2).then_some(ring);
        }
        let area = Polygon { outer: ring.clone(), holes: Vec::new() }.area();
        (ring.len() >= 3 && area >= 1.0).then_some(ring)
    }
}

/// Corners of a drawn ellipse: its area is 0.4 % short of the true one.
const ELLIPSE_CORNERS: usize = 40;

/// The ellipse inscribed in the box of two opposite corners.
fn ellipse(a: Point, b: Point) -> Vec<Point> {
    let (cx, cy) = (0.5 * (a.x + b.x), 0.5 * (a.y + b.y));
    let (rx, ry) = (0.5 * (a.x - b.x).abs(), 0.5 * (a.y - b.y).abs());
    let corner = |i| {
        let (sin, cos) = (std::f64::consts::TAU * i as f64 / ELLIPSE_CORNERS as f64).sin_cos();
        Point::new(cx + rx * cos, cy + ry * sin)
    };
    (0..ELLIPSE_CORNERS).map(corner).collect()
}

#[cfg(test)]
mod tests {
    use super::{Draft, Tool};
    use crate::ground::{Point, Polygon};
    use crate::study::Id;

    fn draft(tool: Tool, points: &[[f64; 2]]) -> Draft {
        Draft { tool, raster: Id(1), points: points.iter().map(|p| Point::from(*p)).collect() }
    }

    #[test]
    fn two_corners_make_a_box_or_an_ellipse_in_it() {
        let corners = [[2.0, 3.0], [12.0, 9.0]];
        let area = |tool| Polygon { outer: draft(tool, &corners).finished().unwrap(), holes: vec![] }.area();
        assert_eq!(area(Tool::Rectangle), 60.0);
        let want = std::f64::consts::PI * 5.0 * 3.0;
        crate::assert_close!(area(Tool::Ellipse), want, 0.005 * want, "ellipse of 10 × 6");
    }

    #[test]
    fn a_line_is_no_outline() {
        assert_eq!(draft(Tool::Polygon, &[[0.0, 0.0], [5.0, 5.0]]).finished(), None);
        assert_eq!(draft(Tool::Rectangle, &[[1.0, 1.0], [9.0, 1.0]]).finished(), None);
    }
}
