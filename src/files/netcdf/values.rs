//! Boxes of values out of a variable, unpacked.

use std::io::{Read as _, Seek as _, SeekFrom};

use crate::files::error::FileError;

use super::Netcdf;
use super::header::Variable;

/// Values in one box: 20 years of minutes fit four times over.
const MOST_VALUES: u64 = 50_000_000;

impl Netcdf {
    /// The values of a box, slowest dimension first: `count[k]` from `start[k]` on along dimension k.
    /// `_FillValue`, `missing_value`, the standard's own fill and NaN become `None`; `scale_factor` and
    /// `add_offset` are applied.
    ///
    /// # Errors
    /// [`FileError`]: the box or the file is too small, or the box too large.
    pub fn read(
        &mut self,
        variable: &Variable,
        start: &[u64],
        count: &[u64],
    ) -> Result<Vec<Option<f64>>, FileError> {
        let shape = self.shape(variable);
        let fits = start.len() == shape.len()
            && count.len() == shape.len()
            && shape
                .iter()
                .zip(start)
                .zip(count)
                .all(|((n, s), c)| s.checked_add(*c).is_some_and(|end| end <= *n));
        if !fits {
            let problem =
                format!("“{}” of {shape:?} values has no box of {count:?} from {start:?}", variable.name);
            return Err(self.malformed(variable.begin, problem));
        }
        let values = count.iter().try_fold(1u64, |n, c| n.checked_mul(*c)).unwrap_or(u64::MAX);
        if values > MOST_VALUES {
            return Err(FileError::too_large(&self.path, "a box of values", values, MOST_VALUES));
        }
        let unpack = Unpack::of(variable);
        let bytes = variable.kind.bytes();
        if values * bytes > self.bytes {
            let problem =
                format!("“{}” should hold {values} values, more than the file has bytes for", variable.name);
            return Err(self.malformed(variable.begin, problem));
        }
        // Trailing dimensions taken whole make longer runs of bytes.
        let mut run = 1u64;
        let mut split = shape.len();
        while split > usize::from(variable.is_record) {
            run *= count[split - 1];
            split -= 1;
            if count[split] != shape[split] {
                break;
            }
        }
        let mut out = Vec::with_capacity(values as usize);
        let mut raw = Vec::new();
        let runs = values.checked_div(run).unwrap_or(0);
        let mut index = start.to_vec();
        for _ in 0..runs {
            let at = self.offset(variable, &shape, &index)?;
            let length = run * bytes;
            if at.checked_add(length).is_none_or(|end| end > self.bytes) {
                let problem = format!(
                    "the values of “{}” go on past the end of the file of {} bytes",
                    variable.name, self.bytes
                );
                return Err(self.malformed(at, problem));
            }
            raw.resize(length as usize, 0);
            self.seek(at)?;
            self.file.read_exact(&mut raw).map_err(|e| FileError::io(&self.path, "reading values", e))?;
            out.extend(raw.chunks_exact(bytes as usize).map(|c| unpack.value(variable.kind.number(c))));
            step(&mut index[..split], &start[..split], &count[..split]);
        }
        Ok(out)
    }

    /// Goes to a byte without dropping what is buffered around it.
    fn seek(&mut self, at: u64) -> Result<(), FileError> {
        let io = |e| FileError::io(&self.path, "seeking", e);
        let now = self.file.stream_position().map_err(io)?;
        let by = i64::try_from(at).ok().zip(i64::try_from(now).ok()).map(|(at, now)| at - now);
        match by {
            Some(by) => self.file.seek_relative(by).map_err(io),
            None => self.file.seek(SeekFrom::Start(at)).map(|_| ()).map_err(io),
        }
    }

    fn offset(&self, variable: &Variable, shape: &[u64], index: &[u64]) -> Result<u64, FileError> {
        let (records, rest) = if variable.is_record { (index[0], 1) } else { (0, 0) };
        let cell = shape[rest..].iter().zip(&index[rest..]);
        let cell = cell.into_iter().try_fold(0u64, |at, (n, i)| at.checked_mul(*n)?.checked_add(*i));
        let inside = cell.and_then(|c| c.checked_mul(variable.kind.bytes()));
        let before = records.checked_mul(self.record_bytes);
        inside
            .zip(before)
            .and_then(|(a, b)| a.checked_add(b)?.checked_add(variable.begin))
            .ok_or_else(|| self.malformed(variable.begin, "a value lies past the end of any file"))
    }
}

/// The next index of a box, the last dimension fastest.
fn step(index: &mut [u64], start: &[u64], count: &[u64]) {
    for k in (0..index.len()).rev() {
        index[k] += 1;
        if index[k] < start[k] + count[k] {
            return;
        }
        index[k] = start[k];
    }
}

/// From stored numbers to values.
struct Unpack {
    missing: Vec<f64>,
    scale: f64,
    offset: f64,
}

impl Unpack {
    fn of(variable: &Variable) -> Self {
        let mut missing: Vec<f64> = variable.numbers("_FillValue").to_vec();
        if missing.is_empty() {
            missing.extend(variable.kind.default_fill());
        }
        missing.extend(variable.numbers("missing_value"));
        let one = |name| variable.numbers(name).first().copied();
        Self { missing, scale: one("scale_factor").unwrap_or(1.0), offset: one("add_offset").unwrap_or(0.0) }
    }

    fn value(&self, stored: f64) -> Option<f64> {
        // Fills are sometimes given in another precision than the values.
        let fill = |m: &f64| *m == stored || (m - stored).abs() <= 1e-6 * m.abs();
        let value = stored * self.scale + self.offset;
        (value.is_finite() && !self.missing.iter().any(fill)).then_some(value)
    }
}
