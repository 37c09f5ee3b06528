//! Sums of pairs of numbers drawn with replacement, many times over: the inner loop of every
//! bootstrap of a mean vector.
//!
//! A draw costs one table look-up and one addition: both numbers stand as fixed-point halves of one
//! 64-bit word. Whole numbers add the same in any order, so neither threads nor registers change a
//! bit of the result.

use rand::Rng as _;
use rayon::prelude::*;

use crate::ground::{Seed, Stopped, Work};

/// Fixed-point steps of the largest number: rounding is below 5·10⁻⁷ of it in each draw.
const UNIT: f64 = (1u64 << 20) as f64;
/// Draws before the halves are emptied: 1024 of at most 2²¹ each stay below 2³².
const RUN: usize = 1024;
/// Resamples that share a random stream.
const CHUNK: u32 = 32;

/// `resamples` sums (Σx, Σy) of as many draws with replacement as there are pairs.
///
/// Indices are drawn with a bias below n/2³².
///
/// # Errors
/// [`Stopped`].
///
/// # Panics
/// When `x` and `y` differ in length, or hold more than 2³¹ numbers.
pub fn resampled_sums(
    x: &[f64],
    y: &[f64],
    resamples: u32,
    seed: Seed,
    label: &str,
    work: &Work,
) -> Result<Vec<[f64; 2]>, Stopped> {
    assert_eq!(x.len(), y.len(), "pairs");
    let count = u32::try_from(x.len()).ok().filter(|n| *n < 1 << 31).expect("fewer than 2³¹ pairs");
    let largest = x.iter().chain(y).fold(0.0f64, |m, v| m.max(v.abs()));
    if count == 0 || largest == 0.0 {
        return Ok(vec![[0.0; 2]; resamples as usize]);
    }
    let fixed = |v: f64| (v / largest * UNIT).round() as i64 + UNIT as i64;
    let table: Vec<u64> = x.iter().zip(y).map(|(x, y)| (fixed(*x) as u64) << 32 | fixed(*y) as u64).collect();
    let offset = f64::from(count) * UNIT;
    let scale = largest / UNIT;
    let chunks: Vec<Vec<[f64; 2]>> = (0..resamples.div_ceil(CHUNK))
        .into_par_iter()
        .map(|chunk| {
            let mut seeds = seed.stream(label, u64::from(chunk));
            (0..CHUNK.min(resamples - chunk * CHUNK))
                .map(|_| {
                    work.advance(0)?;
                    let (high, low) = draw(&table, count, seeds.random());
                    Ok([(high as f64 - offset) * scale, (low as f64 - offset) * scale])
                })
                .collect()
        })
        .collect::<Result<_, Stopped>>()?;
    Ok(chunks.concat())
}

/// Sums of the halves over `count` draws.
fn draw(table: &[u64], count: u32, seed: u64) -> (u64, u64) {
    let mut state = seed;
    let (mut high, mut low) = (0, 0);
    let mut left = count as usize;
    while left > 0 {
        let run = left.min(RUN);
        let mut sums = [0u64; 4];
        for _ in 0..run / 4 {
            let (a, b) = (next(&mut state), next(&mut state));
            sums[0] = sums[0].wrapping_add(table[index(a as u32, count)]);
            sums[1] = sums[1].wrapping_add(table[index((a >> 32) as u32, count)]);
            sums[2] = sums[2].wrapping_add(table[index(b as u32, count)]);
            sums[3] = sums[3].wrapping_add(table[index((b >> 32) as u32, count)]);
        }
        for _ in 0..run % 4 {
            sums[0] = sums[0].wrapping_add(table[index(next(&mut state) as u32, count)]);
        }
        for sum in sums {
            high += sum >> 32;
            low += sum & 0xffff_ffff;
        }
        left -= run;
    }
    (high, low)
}

/// The high word of bits · count: even over 0..count but for count/2³².
#[inline(always)]
fn index(bits: u32, count: u32) -> usize {
    ((u64::from(bits) * u64::from(count)) >> 32) as usize
}

/// A multiplicative counter generator: one wide product a number, period 2⁶⁴.
#[inline(always)]
fn next(state: &mut u64) -> u64 {
    *state = state.wrapping_add(0xa076_1d64_78bd_642f);
    let wide = u128::from(*state) * u128::from(*state ^ 0xe703_7ed1_a0b4_28db);
    (wide >> 64) as u64 ^ wide as u64
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assert_close;

    fn pairs() -> (Vec<f64>, Vec<f64>) {
        (0..2500).map(|i| ((f64::from(i) * 0.7).sin(), 3.0 + (f64::from(i) * 1.3).cos())).unzip()
    }

    #[test]
    fn sums_scatter_as_theory_says() {
        let (x, y) = pairs();
        let sums = resampled_sums(&x, &y, 4000, Seed(3), "test", &Work::quiet()).expect("nobody stops");
        let moments = |v: &[f64]| {
            let mean = v.iter().sum::<f64>() / v.len() as f64;
            (mean, (v.iter().map(|x| (x - mean).powi(2)).sum::<f64>() / v.len() as f64).sqrt())
        };
        for (k, values) in [&x, &y].into_iter().enumerate() {
            let column: Vec<f64> = sums.iter().map(|s| s[k]).collect();
            let ((mean, sd), (own_mean, own_sd)) = (moments(&column), moments(values));
            let root = 2500f64.sqrt();
            assert_close!(mean / 2500.0, own_mean, 4.0 * own_sd / root / 4000f64.sqrt() + 1e-6, "mean {k}");
            assert_close!(sd / root / own_sd, 1.0, 0.04, "deviation {k}");
        }
    }

    #[test]
    fn threads_do_not_change_a_bit() {
        let (x, y) = pairs();
        let run = |threads: usize| {
            let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().expect("a thread pool");
            pool.install(|| {
                resampled_sums(&x, &y, 100, Seed(3), "test", &Work::quiet()).expect("nobody stops")
            })
        };
        assert_eq!(run(1), run(3));
    }
}
