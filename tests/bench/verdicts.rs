//! Does the true theory win, and do class probabilities come true as often as they say?
//!
//! `cargo bench --bench verdicts` grows 400 fields under known winds and prints both.

mod truths;

use rayon::prelude::*;
use truths::{Field, class_forecasts, field, reliability};

const FIELDS: u64 = 400;

fn main() {
    let fields: Vec<Field> = (0..FIELDS).into_par_iter().filter_map(field).collect();
    println!("{} of {FIELDS} fields have a verdict", fields.len());
    let share = |fields: &[&Field], right: &dyn Fn(&Field) -> bool| {
        let won = fields.iter().filter(|f| right(f)).count();
        format!("{won} of {} ({:.1} %)", fields.len(), 100.0 * won as f64 / fields.len().max(1) as f64)
    };
    let all: Vec<&Field> = fields.iter().collect();
    let alone: Vec<&Field> = fields.iter().filter(|f| f.stands_alone()).collect();
    println!(
        "truth more than 20° from every other theory: it leads in {}",
        share(&alone, &|f| f.leader() == f.truth)
    );
    println!(
        "all fields: the leader predicts a trend within 20° of the true theory's in {}",
        share(&all, &|f| f.apart(f.leader()) <= 20.0)
    );
    println!("all fields: the leader is the true theory in {}", share(&all, &|f| f.leader() == f.truth));
    println!("class probabilities: forecasts, mean forecast, came true");
    for bin in reliability(&class_forecasts(&fields), 10).iter().filter(|b| b.count > 0) {
        println!("  {:>5}  {:.3}  {:.3}", bin.count, bin.forecast, bin.observed);
    }
}
