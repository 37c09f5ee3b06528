//! What jobs send back, and what becomes of it.

use std::path::PathBuf;
use std::sync::Arc;

use crate::plate::Figure;
use crate::study::{Id, OpenRaster, TogetherFinding};

use super::{
    Charted, Command, Compared, Delivery, Import, Measured, Model, Opened, PenAnswer, Reading, Recovered,
    SheetCommand, Slot, WindResult, apply, pen,
};

/// An answer from a job.
#[derive(Debug)]
pub enum Answer {
    /// A raster, open to be measured and laid to be seen, or why not.
    Raster(Id, Option<Box<OpenRaster>>, Opened),
    Patch(Id, Box<Measured>),
    Network(Id, Box<Charted>),
    Comparison(Id, Box<Compared>),
    /// What synthetic bedforms in a patch say.
    Recovery(Id, Box<Recovered>),
    Pen(PenAnswer),
    Winds(Vec<WindResult>),
    /// What all patches say together, as the sheet of this fingerprint stood.
    Together(String, Box<TogetherFinding>),
    /// A wind file with what it is taken for.
    Preview(Box<Result<Import, String>>),
    /// The first rows of the file in the preview, as they are cut now.
    Cells(Vec<Vec<String>>),
    /// What the file in the preview gives.
    Reading(Result<Reading, String>),
    Plate(Result<Arc<Figure>, String>),
    /// What was written, or why not.
    Written(Result<String, String>),
    /// The sheet of the demo, laid out on disk.
    Demo(Result<PathBuf, String>),
}

/// Takes in every answer that waits; says whether there was any.
pub fn absorb(model: &mut Model) -> bool {
    let mut any = false;
    while let Some(delivery) = model.session.jobs.next_delivery() {
        any = true;
        match delivery {
            Delivery::Answer(_, answer) => take(model, answer),
            Delivery::Ended(Slot::Chance) => pen::judge_again(model),
            Delivery::Ended(_) => {}
            Delivery::Broke(slot, text) => {
                if slot == Slot::Measure {
                    model.session.pause_measuring(&model.sheet);
                }
                if slot == Slot::Networks {
                    model.session.pause_charting();
                }
                if slot == Slot::Comparisons {
                    model.session.comparing.pause();
                }
                if slot == Slot::Recovery {
                    model.session.recovering.pause();
                }
                let text = format!("A fault in the program ended the work “{slot:?}”: {text}");
                model.session.notices.problem(text);
            }
        }
    }
    if any {
        model.keep_up();
    }
    any
}

fn take(model: &mut Model, answer: Answer) {
    let session = &mut model.session;
    match answer {
        Answer::Raster(id, open, opened) => {
            if let Some(open) = open {
                session.sources.insert(id, *open);
            }
            session.rasters.insert(id, opened);
        }
        Answer::Patch(id, measured) => session.results.take_patch(id, *measured),
        Answer::Comparison(id, compared) => session.results.take_comparison(id, *compared),
        Answer::Recovery(id, recovered) => session.results.take_recovery(id, *recovered),
        Answer::Network(id, charted) => session.results.take_network(id, *charted),
        Answer::Pen(answer) => pen::take(model, answer),
        Answer::Winds(results) => results.into_iter().for_each(|r| session.results.take_wind(r)),
        Answer::Together(sheet, together) => session.results.take_together(sheet, *together),
        Answer::Preview(import) => match *import {
            Ok(import) => session.import = Some(import),
            Err(why) => session.notices.problem(format!("No winds could be read: {why}")),
        },
        Answer::Cells(cells) => {
            if let Some(import) = &mut session.import {
                import.cells = cells;
            }
        }
        Answer::Reading(outcome) => {
            if let Some(import) = &mut session.import {
                import.outcome = Some(outcome);
            }
        }
        Answer::Plate(outcome) => session.preview.outcome = Some(outcome),
        Answer::Written(Ok(done)) => session.notices.done(done),
        Answer::Written(Err(why)) => session.notices.problem(format!("Nothing was written: {why}")),
        Answer::Demo(Ok(path)) => apply(model, Command::Sheet(SheetCommand::Open(path))),
        Answer::Demo(Err(why)) => session.notices.problem(format!("The demo could not be laid out: {why}")),
    }
}
