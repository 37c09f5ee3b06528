//! Packed samples made plain: bit fields, byte order, and the two difference predictors.

/// Spreads unsigned `bits`-wide fields (most significant first, each row padded to whole bytes) into
/// bytes, or into native 16-bit words when they are wider than 8 bits.
pub(super) fn bits(packed: &[u8], per_row: usize, row_bytes: usize, bits: usize) -> Vec<u8> {
    let rows = packed.len() / row_bytes.max(1);
    let mask = (1u32 << bits) - 1;
    let mut out = Vec::with_capacity(per_row * rows * if bits > 8 { 2 } else { 1 });
    for row in packed.chunks_exact(row_bytes.max(1)) {
        let (mut held, mut count, mut next) = (0u32, 0usize, row.iter());
        for _ in 0..per_row {
            while count < bits {
                held = held << 8 | u32::from(next.next().copied().unwrap_or(0));
                count += 8;
            }
            count -= bits;
            let value = held >> count & mask;
            if bits > 8 {
                out.extend_from_slice(&(value as u16).to_ne_bytes())
            } else {
                out.push(value as u8)
            }
        }
    }
    out
}

/// Turns samples of `width` bytes from the file's byte order to the machine's.
pub(super) fn to_native(bytes: &mut [u8], width: usize, big_endian: bool) {
    if width > 1 && big_endian != cfg!(target_endian = "big") {
        match width {
            2 => bytes.as_chunks_mut::<2>().0.iter_mut().for_each(|b| b.reverse()),
            4 => bytes.as_chunks_mut::<4>().0.iter_mut().for_each(|b| b.reverse()),
            _ => bytes.as_chunks_mut::<8>().0.iter_mut().for_each(|b| b.reverse()),
        }
    }
}

/// Undoes predictor 2 on native samples: each is the sum of the one `stride` samples before it in the
/// row and the stored difference, wrapping.
pub(super) fn horizontal_differences(bytes: &mut [u8], row_bytes: usize, stride: usize, width: usize) {
    macro_rules! sum {
        ($type:ty, $n:literal) => {
            for row in bytes.chunks_exact_mut(row_bytes) {
                let cells = row.as_chunks_mut::<$n>().0;
                if stride == 1 {
                    let mut total: $type = 0;
                    for cell in cells {
                        total = total.wrapping_add(<$type>::from_ne_bytes(*cell));
                        *cell = total.to_ne_bytes();
                    }
                } else {
                    for i in stride..cells.len() {
                        let before = <$type>::from_ne_bytes(cells[i - stride]);
                        cells[i] = <$type>::from_ne_bytes(cells[i]).wrapping_add(before).to_ne_bytes();
                    }
                }
            }
        };
    }
    match width {
        1 => sum!(u8, 1),
        2 => sum!(u16, 2),
        4 => sum!(u32, 4),
        _ => sum!(u64, 8),
    }
}

/// Undoes predictor 3: the bytes of a row are differences with a step of `stride` bytes; summed, they
/// hold all most significant bytes first, then the next ones, and so on.
pub(super) fn float_differences(bytes: &mut [u8], row_bytes: usize, stride: usize, width: usize) {
    let mut planes = vec![0; row_bytes];
    for row in bytes.chunks_exact_mut(row_bytes) {
        if stride == 1 {
            let mut total = 0u8;
            for (plane, byte) in planes.iter_mut().zip(&*row) {
                total = total.wrapping_add(*byte);
                *plane = total;
            }
        } else {
            planes.copy_from_slice(row);
            for i in stride..row_bytes {
                planes[i] = planes[i].wrapping_add(planes[i - stride]);
            }
        }
        match width {
            2 => interleave::<2>(&planes, row),
            4 => interleave::<4>(&planes, row),
            _ => interleave::<8>(&planes, row),
        }
    }
}

fn interleave<const N: usize>(planes: &[u8], row: &mut [u8]) {
    let count = planes.len() / N;
    let plane: [&[u8]; N] = std::array::from_fn(|k| {
        let k = if cfg!(target_endian = "big") { k } else { N - 1 - k };
        &planes[k * count..(k + 1) * count]
    });
    for (i, cell) in row.as_chunks_mut::<N>().0.iter_mut().enumerate() {
        for (byte, plane) in cell.iter_mut().zip(plane) {
            *byte = plane[i];
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn twelve_bit_fields_are_read_most_significant_first() {
        let wide = bits(&[0xAB, 0xCD, 0xEF, 0x12, 0x30], 3, 5, 12);
        let words: Vec<u16> = wide.as_chunks::<2>().0.iter().map(|b| u16::from_ne_bytes(*b)).collect();
        assert_eq!(words, [0xABC, 0xDEF, 0x123]);
        assert_eq!(bits(&[0b1011_0000, 0b0100_0000], 3, 1, 1), [1, 0, 1, 0, 1, 0]);
    }

    #[test]
    fn float_differences_restore_the_rows() {
        let values = [1.5f32, -2.25, 1e-20, 7e8];
        let mut planes: Vec<u8> = (0..4).flat_map(|k| values.map(|v| v.to_be_bytes()[k])).collect();
        for i in (1..16).rev() {
            planes[i] = planes[i].wrapping_sub(planes[i - 1]);
        }
        float_differences(&mut planes, 16, 1, 4);
        let back: Vec<f32> = planes.as_chunks::<4>().0.iter().map(|b| f32::from_ne_bytes(*b)).collect();
        assert_eq!(back, values);
    }
}
