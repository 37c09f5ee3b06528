//! Everything the program knows, in three parts with three lives: the sheet is saved and undone,
//! the view is saved only, the session can always be rebuilt.

use std::path::PathBuf;

use crate::ground::{Body, LonLat, Point};
use crate::study::judges::{self, Judges};
use crate::study::{Id, NetworkEntry, Obstacle, Patch, RasterEntry, Sheet, WindEntry};

use super::{
    Opened, Session, Tool, View, Wake, charting, comparing, engine, laying, measuring, pen, plates,
    recovering,
};

/// What panels draw from. It changes only in [`super::apply`] and [`super::absorb`].
#[derive(Debug)]
pub struct Model {
    pub sheet: Sheet,
    pub view: View,
    pub session: Session,
}

impl Model {
    /// An empty sheet. `wake` is called from other threads when an answer has come.
    pub fn new(wake: Wake) -> Self {
        let sheet = Sheet::empty("Untitled");
        let session = Session::new(&sheet, wake);
        Self { sheet, view: View::default(), session }
    }

    /// Reads the list of recent sheets and keeps it from now on.
    pub fn keeping_recent(mut self) -> Self {
        self.session.recent = engine::recent_sheets();
        self.session.keeps_recent = true;
        self
    }

    /// The raster on the table.
    pub fn shown_raster(&self) -> Option<&RasterEntry> {
        self.view.raster.and_then(|id| self.sheet.raster(id)).or(self.sheet.rasters.first())
    }

    pub fn selected_patch(&self) -> Option<&Patch> {
        self.view.patch.and_then(|id| self.sheet.patch(id))
    }

    pub fn selected_obstacle(&self) -> Option<&Obstacle> {
        self.view.obstacle.and_then(|id| self.sheet.obstacle(id))
    }

    pub fn selected_network(&self) -> Option<&NetworkEntry> {
        self.view.network.and_then(|id| self.sheet.network(id))
    }

    /// The network that `tool` works on: the selected one, when it lies on the raster on the table and has the
    /// source the tool is for.
    pub fn network_for(&self, tool: Tool) -> Option<&NetworkEntry> {
        let shown = self.shown_raster()?.id;
        let network = self.selected_network().filter(|n| n.raster == shown)?;
        let fits = if Tool::DRAINAGE.contains(&tool) {
            network.elevation().is_some()
        } else {
            network.image().is_some()
        };
        fits.then_some(network)
    }

    /// The patch whose crests the tools work on: the selected one, when it lies on the raster on the table.
    pub fn crest_patch(&self) -> Option<&Patch> {
        let shown = self.shown_raster()?.id;
        self.selected_patch().filter(|patch| patch.raster == shown)
    }

    /// The wind record on the bench: the user's choice, the selected patch's own, or the first.
    pub fn shown_wind(&self) -> Option<&WindEntry> {
        let own = self.selected_patch().and_then(|patch| self.judges(patch).records.first().copied());
        let chosen = self.view.wind.or(own).and_then(|id| self.sheet.wind(id));
        chosen.or(self.sheet.winds.first())
    }

    /// The records that judge `patch`, as far as its raster is open.
    pub fn judges(&self, patch: &Patch) -> Judges {
        judges::of_patch(&self.sheet, patch, self.session.sources.get(&patch.raster).map(|o| &o.place))
    }

    /// The middle of each patch whose raster is open and lies on the body of the raster on the table; the
    /// raster's own without patches.
    pub(super) fn patch_centres(&self) -> Vec<LonLat> {
        let place = |raster: &Id| self.session.sources.get(raster).map(|open| &open.place);
        let body = self.shown_raster().and_then(|r| place(&r.id)).map(|p| p.body.name.clone());
        let here = |raster: &Id| place(raster).filter(|p| Some(&p.body.name) == body.as_ref());
        let of_patches = self.sheet.patches.iter().filter_map(|p| judges::centre(p, here(&p.raster)));
        let centres: Vec<LonLat> = of_patches.collect();
        if !centres.is_empty() {
            return centres;
        }
        let middle = |(raster, [width, height]): (Id, [usize; 2])| {
            place(&raster)?.lonlat_of(Point::new(0.5 * width as f64, 0.5 * height as f64))
        };
        self.shown_size().and_then(middle).into_iter().collect()
    }

    /// Whether the sheet differs from what is on disk.
    pub fn is_dirty(&self) -> bool {
        self.session.saved != self.sheet
    }

    /// The raster on the table and its width and height, once it is open.
    pub fn shown_size(&self) -> Option<(Id, [usize; 2])> {
        let id = self.shown_raster()?.id;
        Some((id, self.session.rasters.get(&id)?.size()?))
    }

    /// Puts another sheet on the desk; everything of the old one is dropped.
    pub(super) fn replace(&mut self, sheet: Sheet, view: View, path: Option<PathBuf>) {
        let theme = self.view.theme;
        self.sheet = sheet;
        self.view = View { theme, ..view };
        self.session.start_over(&self.sheet, path);
    }

    /// The body whose air moves the sand: the one the raster on the table lies on.
    pub(super) fn wind_body(&self) -> Option<Body> {
        let raster = self.shown_raster()?;
        let laid = self.session.rasters.get(&raster.id).and_then(Opened::laid);
        raster.placement.body.clone().or_else(|| laid.map(|laid| laid.place.body.clone()))
    }

    /// After each command and each answer: what follows from the sheet as it stands now.
    pub(super) fn keep_up(&mut self) {
        self.session.results.follow(&self.sheet);
        laying::follow(self);
        measuring::follow(self);
        charting::follow(self);
        comparing::follow(self);
        recovering::follow(self);
        pen::follow(self);
        plates::follow(self);
    }

    /// Puts `path` first among the recent sheets.
    pub(super) fn remember_recent(&mut self, path: PathBuf) {
        if self.session.keeps_recent {
            match engine::remember_sheet(&path) {
                Ok(list) => self.session.recent = list,
                Err(why) => {
                    self.session.notices.problem(format!("The list of recent sheets was not written: {why}"));
                }
            }
        } else {
            self.session.recent.retain(|known| *known != path);
            self.session.recent.insert(0, path);
        }
    }

    /// After undo or redo: what is selected must still be there.
    pub(super) fn drop_lost_selection(&mut self) {
        let Self { sheet, view, .. } = self;
        view.patch = view.patch.filter(|id| sheet.patch(*id).is_some());
        view.raster = view.raster.filter(|id| sheet.raster(*id).is_some());
        view.wind = view.wind.filter(|id| sheet.wind(*id).is_some());
        view.obstacle = view.obstacle.filter(|id| sheet.obstacle(*id).is_some());
        view.network = view.network.filter(|id| sheet.network(*id).is_some());
    }

    /// The sheet's file name, or its title while it has none.
    pub fn name(&self) -> String {
        let file = self.session.path.as_ref().and_then(|p| p.file_name());
        file.map_or_else(|| self.sheet.title.clone(), |name| name.to_string_lossy().into_owned())
    }
}
