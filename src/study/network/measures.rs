//! Every measure of a network, whichever source it has.

use crate::ground::{Caution, LengthUnit, Stopped, Work};
use crate::science::network::density::density;
use crate::science::network::flow::{self, FlowAsk, PalaeoFlow};
use crate::science::network::hierarchy::{horton, order_counts, tokunaga};
use crate::science::network::hypsometry::hypsometry;
use crate::science::network::junctions::junctions;
use crate::science::network::pattern::pattern;
use crate::science::network::planform::{Planform, planforms};
use crate::science::network::profile::{ProfileAsk, profiles};
use crate::science::network::scaling::{flint, hack};
use crate::study::{NetworkEntry, NetworkFinding, Sheet, fingerprint};

use super::{Found, Ground, words};

/// Long profiles and planforms listed.
const MOST_PROFILES: usize = 40;
const MOST_PLANFORMS: usize = 12;

pub fn measure(
    sheet: &Sheet,
    entry: &NetworkEntry,
    ground: &Ground,
    found: Found,
    work: &Work,
) -> Result<NetworkFinding, Stopped> {
    let s = &sheet.settings.network;
    let Found { network, drainage, tracing, inflation, summit, mut cautions } = found;
    let place = &ground.open.place;
    let unit = place.unit();
    let cell = ground.cell();
    work.phase(&format!("measures of {}", entry.name), 0);
    let area = drainage.as_ref().map_or(ground.area, |d| {
        let picked = entry.elevation().is_some_and(|e| !e.outlets.is_empty());
        if picked { d.basins.iter().map(|b| b.area_m2).sum() } else { d.cells_area_m2 }
    });
    let orders = order_counts(&network);
    let width = mean_width(&network);
    let chord = s.chord.unwrap_or_else(|| width.map_or(s.chord_cells * cell, |w| s.chord_widths * w));
    let seed = sheet.seed.child(&format!("network {}", entry.id.0));
    let junctions = junctions(&network, place, chord, seed, work)?;
    let pattern = pattern(&network, &junctions, place, summit);
    let profile_ask = ProfileAsk {
        theta: s.theta,
        theta_reference: s.theta_reference,
        slope_drop_m: s.slope_drop_m,
        most: MOST_PROFILES,
    };
    let (profiles, chi) = profiles(&network, &profile_ask);
    work.advance(1)?;
    let planforms = planforms(&network, place, s.valley_widths, cell, MOST_PLANFORMS);
    let trunk = planforms.first().map(|p| p.length);
    let hypsometry = drainage
        .as_ref()
        .and_then(|d| d.basins.first())
        .and_then(|b| hypsometry(&b.elevations, b.area_m2, trunk));
    let flow = palaeo_flow(sheet, ground, &network, planforms.first());
    cautions.extend(words::cautions(
        &network,
        &junctions,
        &pattern,
        tracing.is_some(),
        width.map(|w| w / cell),
    ));
    if flow.is_ok() {
        cautions.push(Caution::new("flow-ranges", flow::CAUTION));
    }
    let middle = ground.outline.bounds().map(|b| b.centre());
    Ok(NetworkFinding {
        id: entry.id,
        name: entry.name.clone(),
        raster: entry.raster,
        fingerprint: fingerprint::of_network(sheet, entry),
        unit,
        area,
        centre: middle.and_then(|p| place.lonlat_of(p)),
        factor: ground.factor as usize,
        horton: horton(&orders),
        tokunaga: tokunaga(&network),
        density: density(&network, area, inflation),
        hack: hack(&network),
        flint: flint(&network, s.slope_drop_m),
        orders,
        profiles,
        chi,
        hypsometry,
        junctions,
        pattern,
        planforms,
        flow,
        agreements: Vec::new(),
        sentence: String::new(),
        cautions,
        network,
        drainage,
        tracing,
    })
}

/// Mean of the reaches' widths by length; `None` where no width is known.
fn mean_width(network: &crate::ground::Network) -> Option<f64> {
    let known = || network.reaches.iter().filter_map(|r| Some((r.width?.mean, r.length)));
    let length: f64 = known().map(|(_, l)| l).sum();
    (length > 0.0).then(|| known().map(|(w, l)| w * l).sum::<f64>() / length)
}

fn palaeo_flow(
    sheet: &Sheet,
    ground: &Ground,
    network: &crate::ground::Network,
    trunk: Option<&Planform>,
) -> Result<(FlowAsk, PalaeoFlow), String> {
    let s = &sheet.settings.flow;
    let body = &ground.open.place.body;
    let trunk = trunk.ok_or("there is no channel to measure")?;
    if ground.open.place.unit() != LengthUnit::Metre {
        return Err("the raster has no ground size, so widths in metres are unknown".into());
    }
    let width = trunk.width.as_ref().ok_or("no width is known; widths come from images")?;
    let gravity = body
        .gravity
        .ok_or_else(|| format!("the gravity of {} is not known; state a body that has one", body.name))?;
    let measured = slope(network, trunk);
    let missing = || {
        "no slope is known: name an elevation raster, or state least and greatest slope in the settings"
            .to_owned()
    };
    let least = s.least_slope.or(measured.map(|m| m[0])).ok_or_else(missing)?;
    let greatest = s.greatest_slope.or(measured.map(|m| m[1])).ok_or_else(missing)?;
    let ask = FlowAsk {
        gravity,
        width_m: [width.quartiles[0], width.quartiles[2]],
        width_to_depth: [s.least_width_to_depth, s.greatest_width_to_depth],
        slope: [least.min(greatest), greatest.max(least)],
        friction: [s.least_friction, s.greatest_friction],
        liquid_density: s.liquid_density,
        grain_density: s.grain_density,
        shields: [s.least_shields, s.greatest_shields],
        manning_earth: [s.least_manning, s.greatest_manning],
    };
    flow::flow(&ask).map(|result| (ask, result))
}

/// Least and greatest slope of the reaches along a path, of those that fall; `None` without elevation.
fn slope(network: &crate::ground::Network, path: &Planform) -> Option<[f64; 2]> {
    let fall = |r: &usize| {
        let reach = network.reaches.get(*r)?;
        let z = |n: usize| network.nodes.get(n).and_then(|node| node.elevation_m);
        Some((z(reach.from)? - z(reach.to)?) / reach.length)
    };
    let slopes: Vec<f64> = path.reaches.iter().filter_map(fall).filter(|s| *s > 0.0).collect();
    let least = slopes.iter().copied().fold(f64::INFINITY, f64::min);
    let greatest = slopes.iter().copied().fold(0.0, f64::max);
    (greatest > 0.0).then_some([least, greatest])
}
