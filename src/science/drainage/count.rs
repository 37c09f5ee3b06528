//! Cells counted along single receivers: contributing area where all cells are of one size.
//!
//! A third of all cells have nothing above them, and most others a few cells. Those are added up row by row, many
//! cells at a time; what is left is walked. Both work on as little memory as they can: fresh pages cost more than
//! the sums.

use multiversion::multiversion;

use crate::ground::{Stopped, Work};

use super::routing::{Receivers, VOID};
use super::walk::{PAUSE, TILE, WAITING, donors, load, offsets, tiles};

/// State of a cell that has passed on what it holds.
const DONE: u8 = u8::MAX;
/// Rounds of adding row by row, each on what the former left. No cell then holds more than those within as many
/// steps: (2·7 + 1)² = 225, so that a byte is enough.
const ROUNDS: usize = 7;
/// One cell to wait for, above the bits of a count.
const WAITING_CELL: u32 = 1 << 28;
/// No more cells than a count can hold.
pub(super) const MOST_CELLS: usize = WAITING_CELL as usize - 1;
/// Cells whose starts are kept in one word.
const WORD: usize = 64;

/// The number of cells that drain through each, itself included. There are [`MOST_CELLS`] at most.
///
/// # Errors
/// [`Stopped`].
pub(super) fn counts(receivers: &Receivers, work: &Work) -> Result<Vec<u32>, Stopped> {
    let width = receivers.0.width();
    let mut counts = vec![0u32; receivers.0.len()];
    let starts = add_up(receivers, &mut counts, work)?;
    walk_down(width, receivers.0.values(), &mut counts, &starts, work)?;
    Ok(counts)
}

/// Three rows of states and of cells held, with margins, as one round leaves them.
struct Round {
    states: [Vec<u8>; 3],
    held: [Vec<u8>; 3],
}

/// Fills `counts` with the cells held after all rounds and the number of cells waited for; the cells to walk from,
/// a bit each, rows starting with a new word. Each round follows the former a row behind, while its rows are at hand.
fn add_up(receivers: &Receivers, counts: &mut [u32], work: &Work) -> Result<Vec<u64>, Stopped> {
    let (width, height) = (receivers.0.width(), receivers.0.height());
    let codes = |row: usize| receivers.0.values().get(row * width..(row + 1) * width);
    let words = width.div_ceil(WORD);
    let mut starts = vec![0u64; words * height];
    let row_of = |value: u8| -> [Vec<u8>; 3] { std::array::from_fn(|_| vec![value; width + 2]) };
    let mut around = row_of(VOID);
    let mut rounds: Vec<Round> =
        (0..=ROUNDS).map(|_| Round { states: row_of(VOID), held: row_of(1) }).collect();
    load(codes(0), &mut around[2]);
    for row in 0..height + ROUNDS {
        around.rotate_left(1);
        load(codes(row + 1), &mut around[2]);
        rounds[0].states.rotate_left(1);
        let into = &mut rounds[0].states[2];
        if row < height {
            donors(&around[0], &around[1], &around[2], &mut into[1..=width]);
        } else {
            into.fill(VOID);
        }
        for round in 1..=ROUNDS {
            let (former, later) = rounds.split_at_mut(round);
            let (former, later) = (&former[round - 1], &mut later[0]);
            later.states.rotate_left(1);
            later.held.rotate_left(1);
            let (states, held) = (&mut later.states[2][1..=width], &mut later.held[2][1..=width]);
            if (round..height + round).contains(&row) {
                pass_on(&former.states, &former.held, states, held);
            } else {
                states.fill(VOID);
            }
        }
        if let Some(row) = row.checked_sub(ROUNDS) {
            let last = &rounds[ROUNDS];
            let out = &mut counts[row * width..(row + 1) * width];
            settle(&last.states[2][1..=width], &last.held[2][1..=width], out);
            mark_starts(&last.states[2][1..=width], &mut starts[row * words..(row + 1) * words]);
        }
        work.advance(u64::from(row < height))?;
    }
    Ok(starts)
}

/// Lets every cell that waits for nothing pass on what it holds: states and sums of the middle row.
#[multiversion(targets("x86_64+avx512f+avx512bw+avx512vl+avx512dq", "x86_64+avx2"))]
fn pass_on(states: &[Vec<u8>; 3], held: &[Vec<u8>; 3], out: &mut [u8], sums: &mut [u8]) {
    let n = out.len();
    let sums = &mut sums[..n];
    let [s0, s1, s2] = [&states[0][..n + 2], &states[1][..n + 2], &states[2][..n + 2]];
    let [h0, h1, h2] = [&held[0][..n + 2], &held[1][..n + 2], &held[2][..n + 2]];
    for i in 0..n {
        let (mut waits, mut sum) = (0u8, h1[i + 1]);
        // A state is a bare code when nothing is waited for.
        let around = [
            (s1[i], h1[i], 0u8),
            (s0[i], h0[i], 1),
            (s0[i + 1], h0[i + 1], 2),
            (s0[i + 2], h0[i + 2], 3),
            (s1[i + 2], h1[i + 2], 4),
            (s2[i + 2], h2[i + 2], 5),
            (s2[i + 1], h2[i + 1], 6),
            (s2[i], h2[i], 7),
        ];
        for (state, held, toward) in around {
            let hit = if state == toward { u8::MAX } else { 0 };
            waits += hit & WAITING;
            sum += hit & held;
        }
        sums[i] = sum;
        let state = s1[i + 1];
        out[i] = if state < WAITING { DONE } else { state.wrapping_sub(waits) };
    }
}

/// Cells held and cells waited for, in one number.
#[multiversion(targets("x86_64+avx512f+avx512bw+avx512vl+avx512dq", "x86_64+avx2"))]
fn settle(states: &[u8], held: &[u8], out: &mut [u32]) {
    for ((out, state), held) in out.iter_mut().zip(states).zip(held) {
        let waits = if *state == DONE { 0 } else { state / WAITING };
        *out = u32::from(*held) | (u32::from(waits) * WAITING_CELL);
    }
}

/// Sets the bits of cells that wait for nothing and have not passed on, eight at a time.
fn mark_starts(states: &[u8], words: &mut [u64]) {
    const TOPS: u64 = 0x8080_8080_8080_8080;
    for (word, states) in words.iter_mut().zip(states.chunks(WORD)) {
        for (i, states) in states.chunks(8).enumerate() {
            let mut eight = [DONE; 8];
            eight[..states.len()].copy_from_slice(states);
            let states = u64::from_le_bytes(eight);
            // The top bit of each byte, where one of its upper four is set: done or waiting.
            let busy = states | states << 1 | states << 2 | states << 3;
            // The product moves the bit of byte k, now its lowest, to k of the uppermost byte.
            let bits = ((!busy & TOPS) >> 7).wrapping_mul(0x0102_0408_1020_4080) >> 56;
            *word |= bits << (8 * i);
        }
    }
}

/// Follows the flow from every start to the first cell that still waits. Tile by tile, so that what a walk touches
/// is at hand.
fn walk_down(
    width: usize,
    codes: &[u8],
    counts: &mut [u32],
    starts: &[u64],
    work: &Work,
) -> Result<(), Stopped> {
    let height = counts.len().checked_div(width).unwrap_or(0);
    let offsets = offsets(width);
    let words = width.div_ceil(WORD);
    let mut left_to_pause = PAUSE;
    for (top, left) in tiles(width, height) {
        for row in top..height.min(top + TILE[0]) {
            for number in left / WORD..words.min((left + TILE[1]) / WORD) {
                let mut word = starts[row * words + number];
                while word != 0 {
                    let mut at = row * width + number * WORD + word.trailing_zeros() as usize;
                    word &= word - 1;
                    let mut passed = counts[at];
                    while let Some(offset) = offsets.get(usize::from(codes[at])) {
                        at = at.wrapping_add_signed(*offset);
                        // One cell fewer to wait for.
                        passed = counts[at].wrapping_add(passed).wrapping_sub(WAITING_CELL);
                        counts[at] = passed;
                        if passed >= WAITING_CELL {
                            break;
                        }
                        left_to_pause -= 1;
                        if left_to_pause == 0 {
                            left_to_pause = PAUSE;
                            work.advance(0)?;
                        }
                    }
                }
            }
        }
        work.advance(0)?;
    }
    Ok(())
}
