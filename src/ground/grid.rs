//! A raster in memory: row-major values with a validity mask.

/// Values on a regular grid, row by row from the upper left, each valid or missing.
#[derive(Clone, Debug, PartialEq)]
pub struct Grid<T> {
    width: usize,
    height: usize,
    values: Vec<T>,
    /// `None` when every cell is valid.
    valid: Option<Vec<bool>>,
}

impl<T: Copy> Grid<T> {
    /// A grid of one value, all valid.
    pub fn filled(width: usize, height: usize, value: T) -> Self {
        Self { width, height, values: vec![value; width * height], valid: None }
    }

    /// A grid whose cell at (col, row) is `f(col, row)`, all valid.
    pub fn from_fn(width: usize, height: usize, mut f: impl FnMut(usize, usize) -> T) -> Self {
        let mut values = Vec::with_capacity(width * height);
        for row in 0..height {
            for col in 0..width {
                values.push(f(col, row));
            }
        }
        Self { width, height, values, valid: None }
    }

    /// Takes rows of values and, where some are missing, a mask of the same length.
    ///
    /// # Panics
    /// When a length is not `width * height`: a bug in the caller, never a property of a file.
    pub fn from_parts(width: usize, height: usize, values: Vec<T>, valid: Option<Vec<bool>>) -> Self {
        assert_eq!(values.len(), width * height, "grid values");
        if let Some(mask) = &valid {
            assert_eq!(mask.len(), width * height, "grid mask");
        }
        let valid = valid.filter(|mask| mask.contains(&false));
        Self { width, height, values, valid }
    }

    pub fn width(&self) -> usize {
        self.width
    }

    pub fn height(&self) -> usize {
        self.height
    }

    /// Number of cells, missing ones included.
    pub fn len(&self) -> usize {
        self.values.len()
    }

    pub fn is_empty(&self) -> bool {
        self.values.is_empty()
    }

    /// The stored value, whether valid or not.
    pub fn at(&self, col: usize, row: usize) -> T {
        self.values[row * self.width + col]
    }

    /// The value when the cell exists and is valid.
    pub fn get(&self, col: usize, row: usize) -> Option<T> {
        (col < self.width && row < self.height && self.is_valid(col, row)).then(|| self.at(col, row))
    }

    pub fn is_valid(&self, col: usize, row: usize) -> bool {
        self.valid.as_ref().is_none_or(|mask| mask[row * self.width + col])
    }

    pub fn values(&self) -> &[T] {
        &self.values
    }

    pub fn values_mut(&mut self) -> &mut [T] {
        &mut self.values
    }

    /// The mask, or `None` when every cell is valid.
    pub fn mask(&self) -> Option<&[bool]> {
        self.valid.as_deref()
    }

    /// Number of valid cells.
    pub fn valid_count(&self) -> usize {
        self.valid.as_ref().map_or(self.values.len(), |mask| mask.iter().filter(|v| **v).count())
    }

    /// The valid values, in row order.
    pub fn valid_values(&self) -> impl Iterator<Item = T> + '_ {
        self.values
            .iter()
            .enumerate()
            .filter(|(i, _)| self.valid.as_ref().is_none_or(|mask| mask[*i]))
            .map(|(_, v)| *v)
    }

    /// The same mask over changed values.
    pub fn map<U: Copy>(&self, f: impl Fn(T) -> U) -> Grid<U> {
        Grid {
            width: self.width,
            height: self.height,
            values: self.values.iter().map(|v| f(*v)).collect(),
            valid: self.valid.clone(),
        }
    }

    /// Marks as missing every cell for which `keep(col, row)` is false.
    pub fn mask_where(&mut self, keep: impl Fn(usize, usize) -> bool) {
        let mut mask = self.valid.take().unwrap_or_else(|| vec![true; self.values.len()]);
        for row in 0..self.height {
            for col in 0..self.width {
                mask[row * self.width + col] &= keep(col, row);
            }
        }
        self.valid = mask.contains(&false).then_some(mask);
    }
}
