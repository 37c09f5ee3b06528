//! Looking: cameras, bench pages, layers, theme, what lies over the window. Never undone.

use crate::desk::{Camera, Cursor, Dialog, Model, Page, PickedRegime};
use crate::ground::{Bounds, Point};
use crate::study::Id;

use super::Record;

#[derive(Clone, Debug, PartialEq)]
pub enum ViewCommand {
    Open(Dialog),
    /// Closes whatever lies over the window.
    Close,
    Dismiss(u64),
    Page(Page),
    NextPage,
    PreviousPage,
    Theme,
    Strokes,
    Flow,
    Crests,
    Outlines,
    Names,
    Graticule,
    Networks,
    Divides,
    Changes,
    ShowRaster(Id),
    ShowWind(Id),
    /// Two winds picked on the map of regimes.
    Regime(Option<PickedRegime>),
    /// Where the table looks, from the table's own pointer handling.
    Look {
        raster: Id,
        camera: Camera,
    },
    WholeRaster,
    WholePatch,
    TruePixels,
    Closer,
    Farther,
    /// Where the pointer is; `None` off the raster.
    Point(Option<Cursor>),
    /// The table was laid out at this size, screen points.
    Viewport([f64; 2]),
}

/// One press of the zoom key.
const ZOOM_STEP: f64 = 1.25;

impl ViewCommand {
    pub(super) const LISTED: &[Self] = &[
        Self::Open(Dialog::Finder),
        Self::Open(Dialog::Keys),
        Self::Open(Dialog::Settings),
        Self::Open(Dialog::Bodies),
        Self::Page(Page::Ground),
        Self::Page(Page::Trend),
        Self::Page(Page::Light),
        Self::Page(Page::Spacing),
        Self::Page(Page::Crests),
        Self::Page(Page::Winds),
        Self::Page(Page::Verdict),
        Self::Page(Page::Obstacles),
        Self::Page(Page::Regimes),
        Self::Page(Page::Channels),
        Self::Page(Page::Plate),
        Self::NextPage,
        Self::PreviousPage,
        Self::WholeRaster,
        Self::WholePatch,
        Self::TruePixels,
        Self::Closer,
        Self::Farther,
        Self::Strokes,
        Self::Flow,
        Self::Crests,
        Self::Outlines,
        Self::Names,
        Self::Graticule,
        Self::Networks,
        Self::Divides,
        Self::Changes,
        Self::Theme,
    ];

    pub(super) fn record(&self) -> Record {
        match self {
            Self::Open(dialog) => dialog_record(dialog),
            Self::Close => Record::new("view.close", "Close", "Closes what lies over the window."),
            Self::Dismiss(_) => Record::new("view.dismiss", "Dismiss", "Takes the notice away."),
            Self::Page(page) => page_record(*page),
            Self::NextPage => {
                Record::new("view.next-page", "Next bench page", "Turns the bench on.").alt("ArrowRight")
            }
            Self::PreviousPage => {
                Record::new("view.previous-page", "Previous bench page", "Turns the bench back.")
                    .alt("ArrowLeft")
            }
            Self::Theme => {
                Record::new("view.theme", "Light or dark", "Swaps paper and night colours.").ctrl("T")
            }
            Self::Strokes => {
                Record::new("view.strokes", "Trend strokes", "Shows or hides the strokes.").key("S")
            }
            Self::Flow => Record::new(
                "view.flow",
                "Flow texture",
                "Shows the trend as a texture drawn out along it, in place of strokes.",
            )
            .key("Z"),
            Self::Crests => {
                Record::new("view.crests", "Crest lines", "Shows or hides the crest lines.").key("B")
            }
            Self::Outlines => {
                Record::new("view.outlines", "Outlines", "Shows or hides the patches.").key("O")
            }
            Self::Names => Record::new("view.names", "Patch names", "Shows or hides the names.").key("N"),
            Self::Graticule => {
                Record::new("view.graticule", "Graticule", "Shows or hides longitude and latitude.").key("G")
            }
            Self::Networks => {
                Record::new("view.networks", "Networks", "Shows or hides the channels.").key("W")
            }
            Self::Divides => {
                Record::new("view.divides", "Divides", "Shows or hides the outlines of basins.").key("Y")
            }
            Self::Changes => Record::new(
                "view.changes",
                "Changed ground",
                "Tints what was raised or cut to make the elevation drain.",
            )
            .key("Q"),
            Self::ShowRaster(_) => {
                Record::new("view.raster", "Show raster", "Lays this raster on the table.")
            }
            Self::ShowWind(_) => Record::new("view.wind", "Show winds", "Shows this record on the bench."),
            Self::Regime(_) => Record::new(
                "view.regime",
                "Pick regime",
                "Shows what two winds of this divergence and ratio would make.",
            ),
            Self::Look { .. } => Record::new("view.look", "Look here", "Moves the table's view."),
            Self::WholeRaster => {
                Record::new("view.whole-raster", "Whole raster", "Shows all of the raster.").key("0")
            }
            Self::WholePatch => {
                Record::new("view.whole-patch", "Whole patch", "Shows the selected patch large.").key("F")
            }
            Self::TruePixels => {
                Record::new("view.true-pixels", "True pixels", "One raster pixel a screen point.").key("1")
            }
            Self::Closer => Record::new("view.closer", "Closer", "Zooms in.").key("Plus"),
            Self::Farther => Record::new("view.farther", "Farther", "Zooms out.").key("Minus"),
            Self::Point(_) => Record::new("view.point", "Point", "Follows the pointer."),
            Self::Viewport(_) => Record::new("view.viewport", "Table size", "Follows the window's size."),
        }
    }

    pub(super) fn refusal(&self, model: &Model) -> Option<&'static str> {
        match self {
            Self::WholeRaster | Self::TruePixels | Self::Closer | Self::Farther
                if model.shown_size().is_none() =>
            {
                Some("no raster is open")
            }
            Self::WholePatch if model.selected_patch().is_none() => Some("no patch is selected"),
            _ => None,
        }
    }

    pub(super) fn apply(self, model: &mut Model) {
        let layers = &mut model.view.layers;
        match self {
            Self::Open(dialog) => model.session.dialog = Some(dialog),
            Self::Close => model.session.dialog = None,
            Self::Dismiss(number) => model.session.notices.dismiss(number),
            Self::Page(page) => model.view.page = page,
            Self::NextPage => model.view.page = model.view.page.turned(1),
            Self::PreviousPage => model.view.page = model.view.page.turned(-1),
            Self::Theme => model.view.theme = model.view.theme.other(),
            Self::Strokes => layers.strokes = !layers.strokes,
            Self::Flow => layers.flow = !layers.flow,
            Self::Crests => layers.crests = !layers.crests,
            Self::Outlines => layers.outlines = !layers.outlines,
            Self::Names => layers.names = !layers.names,
            Self::Graticule => layers.graticule = !layers.graticule,
            Self::Networks => layers.networks = !layers.networks,
            Self::Divides => layers.divides = !layers.divides,
            Self::Changes => layers.changes = !layers.changes,
            Self::ShowRaster(id) => model.view.raster = Some(id),
            Self::ShowWind(id) => model.view.wind = Some(id),
            Self::Regime(regime) => model.view.regime = regime.map(PickedRegime::within_map),
            Self::Look { raster, camera } => {
                model.view.cameras.insert(raster, camera);
            }
            Self::WholeRaster => {
                if let Some((id, _)) = model.shown_size() {
                    model.view.cameras.remove(&id);
                }
            }
            Self::WholePatch => {
                let patch = model.selected_patch().map(|p| (p.raster, p.outline.bounds()));
                if let Some((raster, Some(bounds))) = patch {
                    let camera = Camera::fitting(bounds, model.session.viewport);
                    model.view.cameras.insert(raster, camera);
                }
            }
            Self::TruePixels => {
                if let Some((id, camera)) = model.camera() {
                    model.view.cameras.insert(id, Camera { scale: 1.0, ..camera });
                }
            }
            Self::Closer => zoom(model, ZOOM_STEP),
            Self::Farther => zoom(model, 1.0 / ZOOM_STEP),
            Self::Point(cursor) => model.session.cursor = cursor,
            Self::Viewport(size) => model.session.viewport = size,
        }
    }
}

impl Model {
    /// The raster on the table and its camera: the user's, or the one that shows it whole.
    pub fn camera(&self) -> Option<(Id, Camera)> {
        let (id, [width, height]) = self.shown_size()?;
        let bounds = Bounds { min: Point::default(), max: Point::new(width as f64, height as f64) };
        let fitted = || Camera::fitting(bounds, self.session.viewport);
        Some((id, self.view.cameras.get(&id).copied().unwrap_or_else(fitted)))
    }
}

fn zoom(model: &mut Model, factor: f64) {
    if let Some((id, camera)) = model.camera() {
        model.view.cameras.insert(id, camera.zoomed(factor, [0.0, 0.0]));
    }
}

fn dialog_record(dialog: &Dialog) -> Record {
    match dialog {
        Dialog::Finder => {
            Record::new("view.finder", "Find a command…", "Lists every command; type to narrow.").ctrl("K")
        }
        Dialog::Keys => Record::new("view.keys", "Keys", "Lists every key.").key("F1"),
        Dialog::Settings => {
            Record::new("view.settings", "Settings…", "What the methods may be told.").ctrl("Comma")
        }
        Dialog::Bodies => {
            Record::new("view.bodies", "Own bodies…", "Gravity and air of worlds not known by name.")
        }
        Dialog::Unsaved(_) => Record::new("view.unsaved", "Unsaved changes", "Asks before changes are lost."),
    }
}

fn page_record(page: Page) -> Record {
    match page {
        Page::Ground => Record::new("view.ground", "Bench: ground", "Place, north, light, tone.").alt("1"),
        Page::Trend => Record::new("view.trend", "Bench: trend", "Rose, modes, numbers.").alt("2"),
        Page::Light => Record::new("view.light", "Bench: light", "What the light may fake or hide.").alt("3"),
        Page::Spacing => Record::new("view.spacing", "Bench: spacing", "Spectrum and wavelength.").alt("4"),
        Page::Crests => {
            Record::new("view.crests-page", "Bench: crests", "Crest lines, lengths, ends and forks.").alt("5")
        }
        Page::Winds => Record::new("view.winds", "Bench: winds", "Sand rose and drift.").alt("6"),
        Page::Verdict => Record::new("view.verdict", "Bench: verdict", "The dial and the theories.").alt("7"),
        Page::Regimes => {
            Record::new("view.regimes", "Bench: regimes", "Two winds that would make the trend.").alt("8")
        }
        Page::Obstacles => {
            Record::new("view.obstacles", "Bench: obstacles", "Crests round outcrops as wind vanes.").alt("9")
        }
        Page::Channels => {
            Record::new("view.channels", "Bench: channels", "Networks, their measures and palaeo-flow.")
                .alt("0")
        }
        Page::Plate => Record::new("view.plate", "Bench: plate", "The figure for print.").alt("Minus"),
    }
}
