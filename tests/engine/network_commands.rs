//! Every command about networks does what it says, undo takes it back, and refusals say why.

use std::sync::Arc;

use ventifact::desk::{
    Charted, Command, Cursor, DrawCommand, Laid, Model, NetworkCommand, Opened, Page, PatchCommand,
    RasterCommand, SheetCommand, Slot, Standing, TileKey, TileReader, TileShelf, Tool, ViewCommand, apply,
    channels,
};
use ventifact::ground::{Grid, Place, Point, Polygon, Polyline, Work};
use ventifact::study::{
    FromElevation, FromImage, Id, ImageKind, NetworkEntry, RasterEntry, TracedChannel, fingerprint,
};

struct Blank;

impl TileReader for Blank {
    fn size(&self) -> [usize; 2] {
        [100, 80]
    }

    fn read(&self, _: TileKey, _: &Work) -> Result<Grid<f32>, String> {
        Ok(Grid::filled(100, 80, 0.5))
    }
}

/// A desk with one raster of 100 × 80 pixels on the table; nothing is measured.
fn desk(kind: ImageKind) -> Model {
    let mut model = Model::new(Arc::new(|| ()));
    model.session.measures = false;
    model.sheet.rasters.push(RasterEntry {
        id: Id(1),
        name: "plain".into(),
        path: "plain.tif".into(),
        bands: Default::default(),
        kind,
        placement: Default::default(),
        tone: Default::default(),
        light_from: None,
    });
    let tiles = TileShelf::new(Arc::new(Blank), Arc::new(|| ()));
    let laid = Laid { size: [100, 80], place: Place::pixels(0.0), tiles };
    model.session.rasters.insert(Id(1), Opened::Open(Box::new(laid)));
    model.session.viewport = [100.0, 80.0];
    model
}

fn give(model: &mut Model, command: NetworkCommand) {
    apply(model, Command::Network(command));
}

fn undo(model: &mut Model) {
    apply(model, Command::Sheet(SheetCommand::Undo));
}

fn take(model: &mut Model, tool: Tool) {
    apply(model, Command::Draw(DrawCommand::Take(tool)));
}

fn lay(model: &mut Model, x: f64, y: f64) {
    apply(model, Command::Draw(DrawCommand::Lay(Point::new(x, y))));
}

/// A desk with one network, selected.
fn with_network(kind: ImageKind) -> (Model, Id) {
    let mut model = desk(kind);
    give(
        &mut model,
        match kind {
            ImageKind::Elevation => NetworkCommand::AddFromElevation,
            _ => NetworkCommand::AddFromImage,
        },
    );
    let id = model.view.network.expect("the new network is selected");
    (model, id)
}

fn entry(model: &Model) -> &NetworkEntry {
    model.selected_network().expect("a network is selected")
}

fn elevation(model: &Model) -> &FromElevation {
    entry(model).elevation().expect("from elevation")
}

fn image(model: &Model) -> &FromImage {
    entry(model).image().expect("from an image")
}

fn last_word(model: &Model) -> String {
    model.session.notices.shown().last().map(|n| n.text.clone()).unwrap_or_default()
}

/// Does `command`, checks it by `done`, and that undo takes it back and redo does it again.
fn there_and_back(model: &mut Model, command: NetworkCommand, done: impl Fn(&Model) -> bool) {
    let before = model.sheet.clone();
    let label = command.record_label();
    give(model, command);
    assert!(done(model), "{label}: {:?}", model.sheet.networks);
    let after = model.sheet.clone();
    undo(model);
    assert_eq!(model.sheet, before, "undo of {label}");
    apply(model, Command::Sheet(SheetCommand::Redo));
    assert_eq!(model.sheet, after, "redo of {label}");
}

/// The label, for messages.
trait Labelled {
    fn record_label(&self) -> &'static str;
}

impl Labelled for NetworkCommand {
    fn record_label(&self) -> &'static str {
        Command::Network(self.clone()).record().label
    }
}

fn square(from: f64, to: f64) -> Polygon {
    let corners = [[from, from], [to, from], [to, to], [from, to]];
    Polygon { outer: corners.map(Point::from).to_vec(), holes: Vec::new() }
}

#[test]
fn a_network_is_sought_on_the_whole_raster_or_within_the_selected_patch() {
    let mut model = desk(ImageKind::Elevation);
    there_and_back(&mut model, NetworkCommand::AddFromElevation, |m| m.sheet.networks.len() == 1);
    assert_eq!(model.sheet.networks[0].within, None);
    assert_eq!((model.sheet.networks[0].name.as_str(), model.view.page), ("Drainage 1", Page::Channels));
    let outline = square(10.0, 60.0);
    apply(&mut model, Command::Patch(PatchCommand::Add { raster: Id(1), outline: outline.clone() }));
    give(&mut model, NetworkCommand::AddFromElevation);
    assert_eq!(entry(&model).within, Some(outline));
    assert_eq!(entry(&model).name, "Drainage 2");
    undo(&mut model);
    assert_eq!((model.sheet.networks.len(), model.view.network), (1, None), "what is undone is not selected");
}

#[test]
fn heights_and_images_are_told_apart() {
    let mut model = desk(ImageKind::Radar);
    give(&mut model, NetworkCommand::AddFromElevation);
    assert!(
        model.sheet.networks.is_empty() && last_word(&model).contains("heights"),
        "{}",
        last_word(&model)
    );
    give(&mut model, NetworkCommand::AddFromImage);
    assert_eq!(entry(&model).name, "Channels 1");
    let id = entry(&model).id;
    give(&mut model, NetworkCommand::PickOutlet { id, at: Point::new(1.0, 1.0) });
    assert!(last_word(&model).contains("not from elevation"), "{}", last_word(&model));
    let mut model = desk(ImageKind::Elevation);
    give(&mut model, NetworkCommand::AddFromImage);
    assert!(model.sheet.networks.is_empty() && last_word(&model).contains("no image"));
    let mut bare = Model::new(Arc::new(|| ()));
    give(&mut bare, NetworkCommand::AddFromImage);
    assert!(last_word(&bare).contains("no raster is open"));
}

#[test]
fn networks_are_named_walked_through_and_deleted() {
    let (mut model, first) = with_network(ImageKind::Elevation);
    let name = "North basin".to_owned();
    there_and_back(&mut model, NetworkCommand::Rename { id: first, name }, |m| {
        entry(m).name == "North basin"
    });
    give(&mut model, NetworkCommand::AddFromElevation);
    let second = model.view.network.expect("selected");
    give(&mut model, NetworkCommand::SelectNext);
    assert_eq!(model.view.network, Some(first));
    give(&mut model, NetworkCommand::SelectNext);
    assert_eq!(model.view.network, Some(second));
    there_and_back(&mut model, NetworkCommand::Delete, |m| m.sheet.network(second).is_none());
    assert_eq!(model.view.network, Some(first), "the one beside it is in hand");
    give(&mut model, NetworkCommand::Select(None));
    assert_eq!(model.view.network, None);
    give(&mut model, NetworkCommand::Delete);
    assert!(model.sheet.networks.len() == 1 && last_word(&model).contains("no network is selected"));
    give(&mut model, NetworkCommand::Rename { id: Id(99), name: "x".into() });
    assert!(last_word(&model).contains("the network is gone"));
}

#[test]
fn one_drag_of_the_threshold_is_one_step_and_keys_halve_and_double_it() {
    let (mut model, id) = with_network(ImageKind::Elevation);
    give(&mut model, NetworkCommand::HalveThreshold);
    assert!(last_word(&model).contains("not known"), "{}", last_word(&model));
    for m2 in [4e5, 5e5, 6e5] {
        give(&mut model, NetworkCommand::SetThreshold { id, m2: Some(m2) });
    }
    assert!(model.session.history.is_sliding());
    apply(&mut model, Command::Draw(DrawCommand::Settle));
    give(&mut model, NetworkCommand::HalveThreshold);
    give(&mut model, NetworkCommand::DoubleThreshold);
    give(&mut model, NetworkCommand::DoubleThreshold);
    assert_eq!(elevation(&model).threshold_m2, Some(1.2e6));
    for want in [Some(6e5), Some(3e5), Some(6e5), None] {
        undo(&mut model);
        assert_eq!(elevation(&model).threshold_m2, want);
    }
    for wrong in [0.0, -3.0, f64::NAN, f64::INFINITY] {
        give(&mut model, NetworkCommand::SetThreshold { id, m2: Some(wrong) });
        assert_eq!(elevation(&model).threshold_m2, None, "{wrong}");
    }
    assert!(last_word(&model).contains("above 0"));
}

#[test]
fn outlets_are_picked_on_the_table_and_a_second_click_takes_them_away() {
    let (mut model, id) = with_network(ImageKind::Elevation);
    take(&mut model, Tool::Outlet);
    assert_eq!(model.session.tool, Tool::Outlet);
    lay(&mut model, 40.0, 30.0);
    lay(&mut model, 80.0, 70.0);
    assert_eq!(elevation(&model).outlets, [Point::new(40.0, 30.0), Point::new(80.0, 70.0)]);
    lay(&mut model, 41.0, 31.0);
    assert_eq!(elevation(&model).outlets, [Point::new(80.0, 70.0)]);
    undo(&mut model);
    assert_eq!(elevation(&model).outlets.len(), 2);
    let remove = NetworkCommand::RemoveOutlet { id, index: 1 };
    there_and_back(&mut model, remove.clone(), |m| elevation(m).outlets == [Point::new(40.0, 30.0)]);
    give(&mut model, remove);
    assert!(last_word(&model).contains("the outlet is gone"), "{}", last_word(&model));
}

#[test]
fn a_closed_basin_is_outlined_and_let_drain() {
    let (mut model, id) = with_network(ImageKind::Elevation);
    take(&mut model, Tool::Lake);
    for [x, y] in [[10.0, 10.0], [30.0, 10.0], [30.0, 30.0]] {
        lay(&mut model, x, y);
    }
    apply(&mut model, Command::Draw(DrawCommand::Finish));
    assert_eq!(elevation(&model).closed[0].area(), 200.0);
    assert_eq!((model.session.tool, model.sheet.patches.len()), (Tool::Hand, 0));
    undo(&mut model);
    assert!(elevation(&model).closed.is_empty());
    let mark = NetworkCommand::MarkClosed { id, outline: square(5.0, 9.0) };
    there_and_back(&mut model, mark, |m| elevation(m).closed.len() == 1);
    let open = NetworkCommand::RemoveClosed { id, index: 0 };
    there_and_back(&mut model, open.clone(), |m| elevation(m).closed.is_empty());
    give(&mut model, open);
    assert!(last_word(&model).contains("the basin is gone"));
}

#[test]
fn what_is_said_of_an_image_network_is_kept_and_taken_back() {
    let (mut model, id) = with_network(ImageKind::Optical);
    let at = Point::new(20.0, 20.0);
    there_and_back(&mut model, NetworkCommand::SetProposed { id, proposed: false }, |m| !image(m).proposed);
    there_and_back(&mut model, NetworkCommand::Strike { id, at }, |m| image(m).struck == [at]);
    there_and_back(&mut model, NetworkCommand::Unstrike { id, index: 0 }, |m| image(m).struck.is_empty());
    let line = Polyline(vec![at, Point::new(50.0, 20.0)]);
    let channel = TracedChannel { picks: line.0.clone(), line };
    there_and_back(&mut model, NetworkCommand::Trace { id, channel: channel.clone() }, |m| {
        image(m).traced == [channel.clone()]
    });
    there_and_back(&mut model, NetworkCommand::RemoveTrace { id, index: 0 }, |m| image(m).traced.is_empty());
    let raster = Some(Id(1));
    there_and_back(&mut model, NetworkCommand::SetElevation { id, raster }, |m| image(m).elevation == raster);
    let short = TracedChannel { picks: vec![at], line: Polyline(vec![at]) };
    give(&mut model, NetworkCommand::Trace { id, channel: short });
    assert!(image(&model).traced.is_empty() && last_word(&model).contains("two picks"));
    for (gone, word) in [
        (NetworkCommand::Unstrike { id, index: 3 }, "cross"),
        (NetworkCommand::RemoveFlow { id, index: 3 }, "arrow"),
        (NetworkCommand::RemoveTrace { id, index: 3 }, "traced"),
    ] {
        give(&mut model, gone);
        assert!(last_word(&model).contains(word), "{}", last_word(&model));
    }
}

#[test]
fn two_clicks_are_an_arrow_and_the_tool_stays_in_hand() {
    let (mut model, id) = with_network(ImageKind::Optical);
    take(&mut model, Tool::Arrow);
    lay(&mut model, 10.0, 10.0);
    lay(&mut model, 30.0, 40.0);
    assert_eq!(image(&model).flows, [[Point::new(10.0, 10.0), Point::new(30.0, 40.0)]]);
    assert_eq!(model.session.tool, Tool::Arrow);
    lay(&mut model, 50.0, 50.0);
    apply(&mut model, Command::Draw(DrawCommand::Retract));
    assert_eq!((image(&model).flows.len(), model.session.draft.is_none()), (1, true));
    there_and_back(&mut model, NetworkCommand::RemoveFlow { id, index: 0 }, |m| image(m).flows.is_empty());
}

#[test]
fn tools_of_a_network_need_one_of_their_kind_on_the_table() {
    let mut model = desk(ImageKind::Elevation);
    for tool in Tool::DRAINAGE.into_iter().chain(Tool::CHANNELS) {
        take(&mut model, tool);
        assert_eq!(model.session.tool, Tool::Hand, "{tool:?} without a network");
    }
    let (mut model, _) = with_network(ImageKind::Elevation);
    take(&mut model, Tool::Pen);
    assert_eq!(model.session.tool, Tool::Hand, "no pen for a network from elevation");
    take(&mut model, Tool::Outlet);
    give(&mut model, NetworkCommand::Select(None));
    lay(&mut model, 10.0, 10.0);
    assert!(last_word(&model).contains("not on the table"), "{}", last_word(&model));
}

#[test]
fn striking_where_nothing_is_found_says_so() {
    let (mut model, _) = with_network(ImageKind::Optical);
    take(&mut model, Tool::Strike);
    lay(&mut model, 10.0, 10.0);
    assert!(
        image(&model).struck.is_empty() && last_word(&model).contains("No reach"),
        "{}",
        last_word(&model)
    );
    apply(
        &mut model,
        Command::View(ViewCommand::Point(Some(Cursor { raster: Id(1), pixel: Point::new(9.0, 9.0) }))),
    );
    assert!(channels::pointed_reach(&model).is_none());
}

#[test]
fn a_removed_raster_takes_its_networks_with_it() {
    let (mut model, _) = with_network(ImageKind::Elevation);
    let before = model.sheet.clone();
    apply(&mut model, Command::Raster(RasterCommand::Remove(Id(1))));
    assert!(model.sheet.networks.is_empty() && model.view.network.is_none());
    undo(&mut model);
    assert_eq!(model.sheet, before);
}

#[test]
fn a_result_goes_out_of_date_with_an_edit_and_comes_back_with_undo() {
    let (mut model, id) = with_network(ImageKind::Elevation);
    assert_eq!(model.session.results.network_standing(id), Standing::Unmeasured);
    let fingerprint = fingerprint::of_network(&model.sheet, entry(&model));
    model.session.results.take_network(id, Charted::new(Err("too flat".into()), fingerprint));
    assert_eq!(model.session.results.network_standing(id), Standing::Failed);
    let failures = model.session.results.failures(&model.sheet);
    assert_eq!((failures[0].what.as_str(), failures[0].why.as_str()), ("network Drainage 1", "too flat"));
    give(&mut model, NetworkCommand::SetThreshold { id, m2: Some(1e4) });
    assert_eq!(model.session.results.network_standing(id), Standing::OutOfDate);
    assert_eq!(model.session.results.networks_wanting(&model.sheet).len(), 1);
    undo(&mut model);
    assert_eq!(model.session.results.network_standing(id), Standing::Failed);
    assert!(channels::entries(&model)[0].spoken().contains("too flat"));
}

/// Measured in the background even when the raster is not open: then in words why not.
#[test]
fn a_network_is_measured_by_itself_and_says_what_stands_against_it() {
    let (mut model, id) = with_network(ImageKind::Elevation);
    model.session.measures = true;
    give(&mut model, NetworkCommand::PickOutlet { id, at: Point::new(3.0, 3.0) });
    let end = std::time::Instant::now() + std::time::Duration::from_secs(20);
    while model.session.results.charted(id).is_none() {
        assert!(std::time::Instant::now() < end, "no answer; running {:?}", model.session.jobs.running());
        ventifact::desk::absorb(&mut model);
        std::thread::sleep(std::time::Duration::from_millis(2));
    }
    assert_eq!(model.session.results.network_standing(id), Standing::Failed);
    ventifact::desk::absorb(&mut model);
    assert!(!model.session.jobs.is_running(Slot::Networks), "a failure is not tried again");
}
