//! Sums with a compensated error and a fixed order: the same bits for any number of threads.

use rayon::prelude::*;

/// Neumaier's running sum.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Sum {
    high: f64,
    low: f64,
}

/// Items per chunk of a parallel sum: fixed, so that the order does not depend on the threads.
const CHUNK: usize = 8192;

impl Sum {
    pub fn add(&mut self, x: f64) {
        let t = self.high + x;
        self.low += if self.high.abs() >= x.abs() { (self.high - t) + x } else { (x - t) + self.high };
        self.high = t;
    }

    pub fn value(self) -> f64 {
        self.high + self.low
    }

    fn merge(mut self, other: Self) -> Self {
        self.add(other.high);
        self.add(other.low);
        self
    }
}

impl FromIterator<f64> for Sum {
    fn from_iter<I: IntoIterator<Item = f64>>(items: I) -> Self {
        let mut sum = Self::default();
        items.into_iter().for_each(|x| sum.add(x));
        sum
    }
}

/// The compensated sum of the numbers, in order.
pub fn total(items: impl IntoIterator<Item = f64>) -> f64 {
    items.into_iter().collect::<Sum>().value()
}

/// The sums of N quantities `f(i)` over i in 0..n, chunk by chunk on all threads. The chunks are
/// fixed and joined in order, so the result has the same bits for 1 or many threads.
pub fn totals<const N: usize>(n: usize, f: impl Fn(usize) -> [f64; N] + Sync) -> [f64; N] {
    let chunk = |c: usize| {
        let mut sums = [Sum::default(); N];
        for i in c * CHUNK..((c + 1) * CHUNK).min(n) {
            for (sum, x) in sums.iter_mut().zip(f(i)) {
                sum.add(x);
            }
        }
        sums
    };
    let chunks = n.div_ceil(CHUNK);
    let parts: Vec<[Sum; N]> = if chunks > 1 {
        (0..chunks).into_par_iter().map(chunk).collect()
    } else {
        (0..chunks).map(chunk).collect()
    };
    parts
        .into_iter()
        .fold([Sum::default(); N], |mut all, part| {
            for (a, p) in all.iter_mut().zip(part) {
                *a = a.merge(p);
            }
            all
        })
        .map(Sum::value)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn small_terms_survive_large_ones() {
        assert_eq!(total([1.0, 1e100, 1.0, -1e100]), 2.0);
    }

    #[test]
    fn threads_do_not_change_the_bits() {
        let f = |i: usize| [(i as f64).sin() * 1e8, (i as f64 * 0.37).cos()];
        let run = |threads: usize| {
            let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().expect("a thread pool");
            pool.install(|| totals(100_000, f))
        };
        assert_eq!(run(1).map(f64::to_bits), run(3).map(f64::to_bits));
    }
}
