//! Channel networks: where they are sought, and what the user says and draws of them.

use crate::desk::channels::{self, reach_near};
use crate::desk::{MergeKey, Model, Motif, Page, Tool};
use crate::ground::{Point, Polygon};
use crate::study::{FromElevation, FromImage, Id, ImageKind, NetworkEntry, NetworkSource, TracedChannel};

use super::Record;

#[derive(Clone, Debug, PartialEq)]
pub enum NetworkCommand {
    /// Of the raster on the table, within the selected patch when it lies there.
    AddFromElevation,
    AddFromImage,
    Rename {
        id: Id,
        name: String,
    },
    Select(Option<Id>),
    SelectNext,
    /// Removes the selected network.
    Delete,
    /// The threshold of one network, m²; `None` = as the settings or the test have it. Those of one drag are one
    /// undo step.
    SetThreshold {
        id: Id,
        m2: Option<f64>,
    },
    HalveThreshold,
    DoubleThreshold,
    PickOutlet {
        id: Id,
        at: Point,
    },
    RemoveOutlet {
        id: Id,
        index: usize,
    },
    /// A lake or basin that stays closed.
    MarkClosed {
        id: Id,
        outline: Polygon,
    },
    RemoveClosed {
        id: Id,
        index: usize,
    },
    /// Whether channels are proposed by themselves.
    SetProposed {
        id: Id,
        proposed: bool,
    },
    /// The proposed reach at this point is no channel.
    Strike {
        id: Id,
        at: Point,
    },
    Unstrike {
        id: Id,
        index: usize,
    },
    /// The water went from the first to the second point.
    SetFlow {
        id: Id,
        arrow: [Point; 2],
    },
    RemoveFlow {
        id: Id,
        index: usize,
    },
    /// The elevation raster that tells which way the channels fall.
    SetElevation {
        id: Id,
        raster: Option<Id>,
    },
    /// A channel drawn with the pen.
    Trace {
        id: Id,
        channel: TracedChannel,
    },
    RemoveTrace {
        id: Id,
        index: usize,
    },
}

impl NetworkCommand {
    pub(super) const LISTED: &[Self] = &[
        Self::AddFromElevation,
        Self::AddFromImage,
        Self::SelectNext,
        Self::HalveThreshold,
        Self::DoubleThreshold,
        Self::Delete,
    ];

    pub(super) fn record(&self) -> Record {
        match self {
            Self::AddFromElevation => Record::new(
                "network.from-elevation",
                "Network from elevation",
                "Routes water over the heights on the table, within the selected patch if there is one.",
            )
            .key("D")
            .editing(),
            Self::AddFromImage => Record::new(
                "network.from-image",
                "Network from image",
                "Looks for channels on the image on the table, within the selected patch if there is one.",
            )
            .key("I")
            .editing(),
            Self::Rename { .. } => {
                Record::new("network.rename", "Rename network", "Gives the network another name.").editing()
            }
            Self::Select(_) => {
                Record::new("network.select", "Select network", "Shows the network on the bench.")
            }
            Self::SelectNext => {
                Record::new("network.next", "Next network", "Selects the next network of the ledger.")
                    .key("K")
            }
            Self::Delete => Record::new(
                "network.delete",
                "Delete network",
                "Removes the selected network; undo brings it back.",
            )
            .alt("Delete")
            .editing(),
            Self::SetThreshold { .. } => Record::new(
                "network.threshold",
                "Change threshold",
                "The area that must drain through a place for a channel to begin there.",
            )
            .editing(),
            Self::HalveThreshold => {
                Record::new("network.halve", "Half the threshold", "Channels begin with half the area.")
                    .key("Comma")
                    .editing()
            }
            Self::DoubleThreshold => {
                Record::new("network.double", "Twice the threshold", "Channels begin with twice the area.")
                    .key("Period")
                    .editing()
            }
            Self::PickOutlet { .. } => {
                Record::new("network.outlet", "Add outlet", "Keeps what drains through this place.").editing()
            }
            Self::RemoveOutlet { .. } => {
                Record::new("network.remove-outlet", "Remove outlet", "Takes the outlet away.").editing()
            }
            Self::MarkClosed { .. } => {
                Record::new("network.closed", "Add closed basin", "Leaves this basin its water.").editing()
            }
            Self::RemoveClosed { .. } => {
                Record::new("network.remove-closed", "Open basin", "Lets the basin drain.").editing()
            }
            Self::SetProposed { .. } => Record::new(
                "network.proposed",
                "Propose channels",
                "Whether channels are sought by themselves, or only those traced count.",
            )
            .editing(),
            Self::Strike { .. } => {
                Record::new("network.strike", "Strike this reach", "Takes a proposed reach out.").editing()
            }
            Self::Unstrike { .. } => {
                Record::new("network.unstrike", "Bring reach back", "Takes the cross away.").editing()
            }
            Self::SetFlow { .. } => {
                Record::new("network.flow", "Add flow arrow", "The water went this way.").editing()
            }
            Self::RemoveFlow { .. } => {
                Record::new("network.remove-flow", "Remove flow arrow", "Takes the arrow away.").editing()
            }
            Self::SetElevation { .. } => Record::new(
                "network.elevation",
                "Elevation of the channels",
                "Heights that tell which way they fall.",
            )
            .editing(),
            Self::Trace { .. } => {
                Record::new("network.trace", "Add traced channel", "Keeps the channel drawn with the pen.")
                    .editing()
            }
            Self::RemoveTrace { .. } => {
                Record::new("network.remove-trace", "Remove traced channel", "Takes it away.").editing()
            }
        }
    }

    pub(super) fn refusal(&self, model: &Model) -> Option<&'static str> {
        let shown = model.shown_raster().map(|r| r.kind);
        match self {
            Self::AddFromElevation | Self::AddFromImage if model.shown_size().is_none() => {
                Some("no raster is open")
            }
            Self::AddFromElevation if shown != Some(ImageKind::Elevation) => {
                Some("the raster on the table is not said to hold heights (bench page Ground)")
            }
            Self::AddFromImage if shown == Some(ImageKind::Elevation) => {
                Some("the raster on the table holds heights, no image")
            }
            Self::SelectNext if model.sheet.networks.is_empty() => Some("the sheet has no network"),
            Self::Delete if model.selected_network().is_none() => Some("no network is selected"),
            Self::HalveThreshold | Self::DoubleThreshold => stepped(model, 1.0).err(),
            _ => self.subject().and_then(|id| self.problem(model.sheet.network(id))),
        }
    }

    /// The network it is about, where the command names one.
    fn subject(&self) -> Option<Id> {
        match self {
            Self::AddFromElevation
            | Self::AddFromImage
            | Self::Select(_)
            | Self::SelectNext
            | Self::Delete
            | Self::HalveThreshold
            | Self::DoubleThreshold => None,
            Self::Rename { id, .. }
            | Self::SetThreshold { id, .. }
            | Self::PickOutlet { id, .. }
            | Self::RemoveOutlet { id, .. }
            | Self::MarkClosed { id, .. }
            | Self::RemoveClosed { id, .. }
            | Self::SetProposed { id, .. }
            | Self::Strike { id, .. }
            | Self::Unstrike { id, .. }
            | Self::SetFlow { id, .. }
            | Self::RemoveFlow { id, .. }
            | Self::SetElevation { id, .. }
            | Self::Trace { id, .. }
            | Self::RemoveTrace { id, .. } => Some(*id),
        }
    }

    /// Why the command does not fit its network.
    fn problem(&self, network: Option<&NetworkEntry>) -> Option<&'static str> {
        let Some(network) = network else { return Some("the network is gone") };
        match (self, &network.source) {
            (Self::Rename { .. }, _) => None,
            (Self::SetThreshold { m2: Some(m2), .. }, _) if !(m2.is_finite() && *m2 > 0.0) => {
                Some("a threshold is an area above 0 m²")
            }
            (Self::RemoveOutlet { index, .. }, NetworkSource::Elevation(it))
                if *index >= it.outlets.len() =>
            {
                Some("the outlet is gone")
            }
            (Self::RemoveClosed { index, .. }, NetworkSource::Elevation(it)) if *index >= it.closed.len() => {
                Some("the basin is gone")
            }
            (
                Self::SetThreshold { .. }
                | Self::PickOutlet { .. }
                | Self::RemoveOutlet { .. }
                | Self::MarkClosed { .. }
                | Self::RemoveClosed { .. },
                NetworkSource::Elevation(_),
            ) => None,
            (
                Self::SetThreshold { .. }
                | Self::PickOutlet { .. }
                | Self::RemoveOutlet { .. }
                | Self::MarkClosed { .. }
                | Self::RemoveClosed { .. },
                NetworkSource::Image(_),
            ) => Some("the network is not from elevation"),
            (Self::Unstrike { index, .. }, NetworkSource::Image(it)) if *index >= it.struck.len() => {
                Some("the cross is gone")
            }
            (Self::RemoveFlow { index, .. }, NetworkSource::Image(it)) if *index >= it.flows.len() => {
                Some("the arrow is gone")
            }
            (Self::RemoveTrace { index, .. }, NetworkSource::Image(it)) if *index >= it.traced.len() => {
                Some("the traced channel is gone")
            }
            (Self::Trace { channel, .. }, NetworkSource::Image(_)) if channel.line.0.len() < 2 => {
                Some("a channel needs two picks")
            }
            (_, NetworkSource::Image(_)) => None,
            (_, NetworkSource::Elevation(_)) => Some("the network is not from an image"),
        }
    }

    pub(super) fn merge_key(&self) -> Option<MergeKey> {
        match self {
            Self::SetThreshold { id, .. } => Some(MergeKey::Threshold(*id)),
            _ => None,
        }
    }

    pub(super) fn apply(self, model: &mut Model) {
        match self {
            Self::AddFromElevation => add(model, NetworkSource::Elevation(FromElevation::default())),
            Self::AddFromImage => add(model, NetworkSource::Image(FromImage::default())),
            Self::Rename { id, name } => change(model, id, |network| network.name = name),
            Self::Select(id) => select(model, id),
            Self::SelectNext => {
                let networks = &model.sheet.networks;
                let at = networks.iter().position(|n| Some(n.id) == model.view.network);
                let next = networks.get(at.map_or(0, |at| (at + 1) % networks.len())).map(|n| n.id);
                select(model, next);
            }
            Self::Delete => delete(model),
            Self::SetThreshold { id, m2 } => elevation(model, id, |it| it.threshold_m2 = m2),
            Self::HalveThreshold => step(model, 0.5),
            Self::DoubleThreshold => step(model, 2.0),
            Self::PickOutlet { id, at } => elevation(model, id, |it| it.outlets.push(at)),
            Self::RemoveOutlet { id, index } => elevation(model, id, |it| {
                it.outlets.remove(index);
            }),
            Self::MarkClosed { id, outline } => elevation(model, id, |it| it.closed.push(outline)),
            Self::RemoveClosed { id, index } => elevation(model, id, |it| {
                it.closed.remove(index);
            }),
            Self::SetProposed { id, proposed } => image(model, id, |it| it.proposed = proposed),
            Self::Strike { id, at } => image(model, id, |it| it.struck.push(at)),
            Self::Unstrike { id, index } => image(model, id, |it| {
                it.struck.remove(index);
            }),
            Self::SetFlow { id, arrow } => image(model, id, |it| it.flows.push(arrow)),
            Self::RemoveFlow { id, index } => image(model, id, |it| {
                it.flows.remove(index);
            }),
            Self::SetElevation { id, raster } => image(model, id, |it| it.elevation = raster),
            Self::Trace { id, channel } => image(model, id, |it| it.traced.push(channel)),
            Self::RemoveTrace { id, index } => image(model, id, |it| {
                it.traced.remove(index);
            }),
        }
    }

    /// What a click of the outlet or strike tool asks for: the thing laid there, or the one that lies there
    /// taken away. `None`, and a word to the user, when nothing is there to strike.
    pub(super) fn of_click(model: &mut Model, tool: Tool, at: Point) -> Option<Self> {
        let network = model.network_for(tool)?;
        let (id, reach) = (network.id, channels::pointer_reach(model));
        let near = |points: &[Point]| points.iter().position(|p| p.distance(at) <= reach);
        match (tool, &network.source) {
            (Tool::Outlet, NetworkSource::Elevation(it)) => Some(match near(&it.outlets) {
                Some(index) => Self::RemoveOutlet { id, index },
                None => Self::PickOutlet { id, at },
            }),
            (Tool::Strike, NetworkSource::Image(it)) => {
                if let Some(index) = near(&it.struck) {
                    return Some(Self::Unstrike { id, index });
                }
                let found = model.session.results.charted(id).and_then(|c| reach_near(c, at, reach));
                if found.is_none() {
                    model.session.notices.problem("No reach is so near that it could be struck out.");
                }
                found.map(|near| Self::Strike { id, at: near.at })
            }
            _ => None,
        }
    }
}

fn change(model: &mut Model, id: Id, f: impl FnOnce(&mut NetworkEntry)) {
    if let Some(network) = model.sheet.networks.iter_mut().find(|n| n.id == id) {
        f(network);
    }
}

fn elevation(model: &mut Model, id: Id, f: impl FnOnce(&mut FromElevation)) {
    change(model, id, |network| {
        if let NetworkSource::Elevation(it) = &mut network.source {
            f(it);
        }
    });
}

fn image(model: &mut Model, id: Id, f: impl FnOnce(&mut FromImage)) {
    change(model, id, |network| {
        if let NetworkSource::Image(it) = &mut network.source {
            f(it);
        }
    });
}

fn add(model: &mut Model, source: NetworkSource) {
    let Some(raster) = model.shown_raster().map(|r| r.id) else { return };
    let within = model.selected_patch().filter(|p| p.raster == raster).map(|p| p.outline.clone());
    let stem = match source {
        NetworkSource::Elevation(_) => "Drainage",
        NetworkSource::Image(_) => "Channels",
    };
    let (id, name) = (model.sheet.fresh_id(), free_name(model, stem));
    model.sheet.networks.push(NetworkEntry { id, name, raster, within, source });
    select(model, Some(id));
}

/// Selects, lays its raster on the table and turns the bench to it.
fn select(model: &mut Model, id: Option<Id>) {
    let network = id.and_then(|id| model.sheet.network(id));
    model.view.network = network.map(|n| n.id);
    if let Some(raster) = network.map(|n| n.raster) {
        model.view.raster = Some(raster);
        if model.view.page == Page::Plate {
            model.view.plate.motif = Motif::Network;
        } else {
            model.view.page = Page::Channels;
        }
    }
}

fn delete(model: &mut Model) {
    let Some(at) = model.sheet.networks.iter().position(|n| Some(n.id) == model.view.network) else { return };
    let gone = model.sheet.networks.remove(at);
    let next = model.sheet.networks.get(at).or(model.sheet.networks.last()).map(|n| n.id);
    model.view.network = next;
    model.session.notices.done_with_undo(format!("Deleted {}", gone.name));
}

/// The selected network and its threshold in force times `factor`.
fn stepped(model: &Model, factor: f64) -> Result<(Id, f64), &'static str> {
    let network = model.selected_network().ok_or("no network is selected")?;
    if network.elevation().is_none() {
        return Err("the network is not from elevation");
    }
    let now =
        channels::threshold(model, network).ok_or("the threshold is not known before the first result")?;
    Ok((network.id, factor * now))
}

fn step(model: &mut Model, factor: f64) {
    if let Ok((id, m2)) = stepped(model, factor) {
        elevation(model, id, |it| it.threshold_m2 = Some(m2));
    }
}

/// `stem 1`, `stem 2`, … whichever no network has.
fn free_name(model: &Model, stem: &str) -> String {
    let taken = |name: &String| model.sheet.networks.iter().any(|n| n.name == *name);
    let mut numbered = (1..).map(|number| format!("{stem} {number}"));
    numbered.find(|name| !taken(name)).unwrap_or_else(|| stem.to_owned())
}
