//! What jobs send back, and what becomes of it.

use crate::study::Id;

use super::{Delivery, Model, Opened};

/// An answer from a job.
#[derive(Debug)]
pub enum Answer {
    Raster(Id, Opened),
}

/// Takes in every answer that waits; says whether there was any.
pub fn absorb(model: &mut Model) -> bool {
    let mut any = false;
    while let Some(delivery) = model.session.jobs.next_delivery() {
        any = true;
        match delivery {
            Delivery::Answer(_, Answer::Raster(id, opened)) => {
                model.session.rasters.insert(id, opened);
            }
            Delivery::Ended(_) => {}
            Delivery::Broke(slot, text) => {
                let text = format!("A fault in the program ended the work “{slot:?}”: {text}");
                model.session.notices.problem(text);
            }
        }
    }
    any
}
