//! The rows of a record that can move sand, packed so that another law, another threshold or another
//! stretch of weather is one pass over them.

use crate::ground::{Azimuth, Regime, SandFlow, WindSample};

use super::bootstrap::CELLS_PER_BLOCK;
use super::coverage::season_of;
use super::regime::{Drift, SECTOR_DEG, SECTORS, gathered, sector_of};

/// A row that some assumption lets move sand.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Row {
    /// At the anemometer, m s⁻¹.
    pub speed: f64,
    /// Share of all time.
    weight: f64,
    toward: Azimuth,
    east: f64,
    north: f64,
    sector: usize,
    season: Option<u8>,
}

/// All such rows in order of time, cut into the cells the bootstrap draws.
#[derive(Clone, Debug, PartialEq)]
pub struct Movers {
    rows: Vec<Row>,
    /// The first row of each cell, and the number of rows.
    firsts: Vec<usize>,
    /// Winds from this speed on are storms, m s⁻¹.
    storm_speed: f64,
    /// The season that moves most sand, of four.
    season: Option<u8>,
}

/// Flow of one sector: scalar and vector sums.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
struct Part {
    weight: f64,
    east: f64,
    north: f64,
}

type Parts = [Part; SECTORS];

impl Movers {
    /// Packs checked rows. `least_speed` is a speed below which no assumption moves sand; `flux` is that
    /// of the stated assumption, by which storms (the fastest 1 − `storm_quantile` of the time that
    /// sand moves) and the strongest season are told.
    pub fn new(
        kept: &[WindSample],
        per_cell: usize,
        least_speed: f64,
        storm_quantile: f64,
        flux: impl Fn(f64) -> f64,
    ) -> Self {
        let blind = |s: &WindSample| s.from.is_none() && flux(s.speed.unwrap_or(0.0)) > 0.0;
        let time: f64 = kept.iter().filter(|s| !blind(s)).map(|s| s.weight).sum();
        let (mut rows, mut firsts) = (Vec::new(), vec![0]);
        for cell in kept.chunks(per_cell.max(1)) {
            rows.extend(cell.iter().filter_map(|sample| {
                let speed = sample.speed.filter(|v| *v >= least_speed)?;
                let toward = sample.from?.reversed();
                let (east, north) = toward.east_north();
                Some(Row {
                    speed,
                    weight: sample.weight / time,
                    toward,
                    east,
                    north,
                    sector: sector_of(toward),
                    season: sample.time.map(season_of),
                })
            }));
            firsts.push(rows.len());
        }
        let storm_speed = storm_speed(&rows, storm_quantile, &flux);
        let season = strongest_season(&rows, &flux);
        Self { rows, firsts, storm_speed, season }
    }

    /// Number of cells.
    pub fn count(&self) -> usize {
        self.firsts.len() - 1
    }

    pub fn storm_speed(&self) -> f64 {
        self.storm_speed
    }

    /// Index of the strongest season among December–February, March–May, June–August, September–November.
    pub fn season(&self) -> Option<u8> {
        self.season
    }

    /// Flow of each cell over all directions.
    pub fn totals(&self, flux: impl Fn(f64) -> f64) -> Vec<f64> {
        self.firsts
            .windows(2)
            .map(|ends| self.rows[ends[0]..ends[1]].iter().map(|r| r.weight * flux(r.speed)).sum())
            .collect()
    }

    /// Running sums over cells, for drawing drifts under one flux.
    pub fn cumulated(&self, flux: impl Fn(f64) -> f64) -> Cumulated {
        let mut sums = vec![[0.0; 3]];
        let mut so_far = [0.0; 3];
        for ends in self.firsts.windows(2) {
            for row in &self.rows[ends[0]..ends[1]] {
                let weight = row.weight * flux(row.speed);
                for (sum, part) in so_far.iter_mut().zip([weight, weight * row.east, weight * row.north]) {
                    *sum += part;
                }
            }
            sums.push(so_far);
        }
        Cumulated { sums }
    }

    /// The drift of the whole record.
    pub fn drift(&self, unit: &'static str, flux: impl Fn(f64) -> f64) -> Drift {
        Drift::of(&self.flows(|_| true, flux), unit)
    }

    /// The whole record by exact direction.
    pub fn regime(&self, flux: impl Fn(f64) -> f64) -> Regime {
        let part = |which: &dyn Fn(&Row) -> bool| {
            let flows: Vec<_> = self.flows(which, &flux).into_iter().map(Some).collect();
            gathered(&flows)
        };
        Regime {
            all: part(&|_| true),
            storms: part(&|row| row.speed >= self.storm_speed),
            season: part(&|row| self.season.is_some() && row.season == self.season),
        }
    }

    fn flows(&self, which: impl Fn(&Row) -> bool, flux: impl Fn(f64) -> f64) -> Vec<SandFlow> {
        let moved = self
            .rows
            .iter()
            .filter(|row| which(row))
            .map(|row| SandFlow { toward: row.toward, weight: row.weight * flux(row.speed) });
        moved.filter(|flow| flow.weight > 0.0).collect()
    }

    /// The regime made of blocks that begin at the cells `starts`, as many cells as the record has, by
    /// sectors.
    pub fn draw(&self, starts: &[usize], flux: impl Fn(f64) -> f64) -> Regime {
        let mut all: Parts = [Part::default(); SECTORS];
        let mut storms = all;
        let mut season = all;
        let count = self.count();
        let mut left = count;
        for &start in starts {
            let mut at = start;
            let mut cells = CELLS_PER_BLOCK.min(left);
            left -= cells;
            // The record is closed to a ring.
            while cells > 0 {
                let run = cells.min(count - at);
                for row in &self.rows[self.firsts[at]..self.firsts[at + run]] {
                    let moved = flux(row.speed);
                    if moved > 0.0 {
                        let weight = row.weight * moved;
                        all[row.sector].add(weight, row);
                        if row.speed >= self.storm_speed {
                            storms[row.sector].add(weight, row);
                        }
                        if row.season == self.season {
                            season[row.sector].add(weight, row);
                        }
                    }
                }
                cells -= run;
                at = 0;
            }
        }
        let season = if self.season.is_some() { by_sector(&season) } else { Vec::new() };
        Regime { all: by_sector(&all), storms: by_sector(&storms), season }
    }
}

/// Total, east and north flow of all cells before each, so that a block costs two look-ups.
#[derive(Clone, Debug, PartialEq)]
pub struct Cumulated {
    sums: Vec<[f64; 3]>,
}

impl Cumulated {
    /// Total, east and north flow of blocks that begin at the cells `starts`, as many cells as the record
    /// has, closed to a ring.
    pub fn draw(&self, starts: &[usize]) -> [f64; 3] {
        let count = self.sums.len() - 1;
        let mut drawn = [0.0; 3];
        let mut left = count;
        for &start in starts {
            let end = start + CELLS_PER_BLOCK.min(left);
            left -= end - start;
            let (inside, over) = (end.min(count), end.saturating_sub(count));
            for (k, sum) in drawn.iter_mut().enumerate() {
                *sum += self.sums[inside][k] - self.sums[start][k] + self.sums[over][k];
            }
        }
        drawn
    }
}

impl Part {
    fn add(&mut self, weight: f64, row: &Row) {
        self.weight += weight;
        self.east += weight * row.east;
        self.north += weight * row.north;
    }
}

/// The mean direction of each sector keeps that of the resultant; only where its winds cancel exactly is
/// there none, and then the centre serves.
fn by_sector(parts: &Parts) -> Vec<SandFlow> {
    let flowing = parts.iter().enumerate().filter(|(_, part)| part.weight > 0.0);
    let flow = |(sector, part): (usize, &Part)| SandFlow {
        toward: if part.east == 0.0 && part.north == 0.0 {
            Azimuth::from_deg(SECTOR_DEG * sector as f64)
        } else {
            Azimuth::from_east_north(part.east, part.north)
        },
        weight: part.weight,
    };
    flowing.map(flow).collect()
}

/// The speed that `quantile` of the time with moving sand lies below.
fn storm_speed(rows: &[Row], quantile: f64, flux: impl Fn(f64) -> f64) -> f64 {
    let mut moving: Vec<(f64, f64)> =
        rows.iter().filter(|r| flux(r.speed) > 0.0).map(|r| (r.speed, r.weight)).collect();
    moving.sort_by(|a, b| a.0.total_cmp(&b.0));
    let below = quantile * moving.iter().map(|m| m.1).sum::<f64>();
    let mut sum = 0.0;
    let reached = |m: &&(f64, f64)| {
        sum += m.1;
        sum > below
    };
    moving.iter().find(reached).map_or(f64::INFINITY, |m| m.0)
}

fn strongest_season(rows: &[Row], flux: impl Fn(f64) -> f64) -> Option<u8> {
    let mut totals = [0.0; 4];
    for row in rows {
        totals[usize::from(row.season?)] += row.weight * flux(row.speed);
    }
    (0..4).max_by(|a, b| totals[*a].total_cmp(&totals[*b])).filter(|s| totals[*s] > 0.0).map(|s| s as u8)
}

#[cfg(test)]
pub(super) mod tests {
    use super::*;
    use crate::ground::Seed;
    use crate::science::wind::bootstrap::Plan;

    pub fn sample(at: u32, toward: f64, speed: f64) -> WindSample {
        WindSample {
            line: at + 1,
            time: Some(i64::from(at) * 3600),
            speed: Some(speed),
            from: Some(Azimuth::from_deg(toward).reversed()),
            weight: 1.0,
        }
    }

    fn cube(speed: f64) -> f64 {
        (speed - 5.0).max(0.0).powi(3)
    }

    fn packed(kept: &[WindSample], per_cell: usize) -> Movers {
        Movers::new(kept, per_cell, 1.0, 0.9, cube)
    }

    #[test]
    fn every_draw_of_an_even_record_is_the_record() {
        let kept: Vec<_> = (0..400).map(|k| sample(k, 33.0, 7.0)).collect();
        let movers = packed(&kept, 2);
        let plan = Plan::new(movers.count(), None);
        for index in 0..5 {
            let drawn = movers.draw(&plan.starts(Seed(1), index), cube);
            assert_eq!(drawn.all.len(), 1);
            crate::assert_close!(drawn.all[0].weight, cube(7.0), 1e-9, "total");
            crate::assert_close!(drawn.all[0].toward.deg(), 33.0, 1e-9, "mean direction inside the sector");
        }
    }

    #[test]
    fn blocks_in_order_give_the_record_back() {
        let kept: Vec<_> = (0..977).map(|k| sample(k, f64::from(k * 37 % 360), f64::from(k % 13))).collect();
        let movers = packed(&kept, 3);
        let starts: Vec<usize> = (0..movers.count()).step_by(CELLS_PER_BLOCK).collect();
        let (whole, drawn) = (movers.regime(cube), movers.draw(&starts, cube));
        for (a, b) in
            [(&whole.all, &drawn.all), (&whole.storms, &drawn.storms), (&whole.season, &drawn.season)]
        {
            let (a, b) = (Drift::of(a, ""), Drift::of(b, ""));
            crate::assert_close!(a.total, b.total, 1e-9 * a.total, "total");
            // Within a sector of 5° the scalar sum exceeds the vector sum by less than a thousandth.
            crate::assert_close!(a.resultant, b.resultant, 1e-3 * a.total, "resultant");
            let turn = a.toward.zip(b.toward).map_or(f64::NAN, |(p, q)| p.turn_from(q).abs());
            assert!(turn < 0.2, "direction off by {turn}°");
        }
        let [total, east, north] = movers.cumulated(cube).draw(&starts);
        let drift = Drift::of(&whole.all, "");
        crate::assert_close!(total, drift.total, 1e-9 * total, "cumulated total");
        crate::assert_close!(f64::hypot(east, north), drift.resultant, 1e-9 * total, "cumulated resultant");
        // A block that runs over the end begins again at the start.
        let last = movers.count() - 1;
        let ring = movers.cumulated(cube).draw(&[last, 0])[0];
        let expected = Drift::of(&movers.draw(&[last, 0], cube).all, "").total;
        crate::assert_close!(ring, expected, 1e-9 * total, "ring");
        let sum: f64 = movers.totals(cube).iter().sum();
        crate::assert_close!(sum, Drift::of(&whole.all, "").total, 1e-9, "cells add up");
    }

    #[test]
    fn storms_are_the_fastest_tenth_of_the_moving_time() {
        let kept: Vec<_> = (0..1000).map(|k| sample(k, 10.0, 0.02 * f64::from(k))).collect();
        let movers = packed(&kept, 5);
        // 5 to 20 m/s move sand; the fastest tenth of that begins at 18.5 m/s.
        crate::assert_close!(movers.storm_speed(), 18.5, 0.03, "storm speed");
        assert!(movers.regime(cube).storms[0].weight < movers.regime(cube).all[0].weight);
    }
}
