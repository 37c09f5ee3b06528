//! Writes the simplest JPEG: baseline, one level per 8 × 8 block, quantisation 1, so that the decoder must give the
//! levels back exactly (up to colour conversion).

/// A stream of `components` interleaved components; `level(block_col, block_row, component)`.
pub fn write(
    width: usize,
    height: usize,
    components: usize,
    level: impl Fn(usize, usize, usize) -> u8,
) -> Vec<u8> {
    let mut out = vec![0xFF, 0xD8];
    let mut segment = |marker: u8, body: &[u8]| {
        out.extend([0xFF, marker]);
        out.extend((body.len() as u16 + 2).to_be_bytes());
        out.extend(body);
    };
    segment(0xDB, &[vec![0], vec![1; 64]].concat());
    let mut frame = vec![8];
    frame.extend((height as u16).to_be_bytes());
    frame.extend((width as u16).to_be_bytes());
    frame.push(components as u8);
    (0..components).for_each(|c| frame.extend([c as u8 + 1, 0x11, 0]));
    segment(0xC0, &frame);
    // Difference categories 0 to 11 as 4-bit codes; the only other symbol, “end of block”, as one bit.
    let mut counts = [0u8; 16];
    counts[3] = 12;
    segment(0xC4, &[vec![0x00], counts.to_vec(), (0..12).collect()].concat());
    counts = [0; 16];
    counts[0] = 1;
    segment(0xC4, &[vec![0x10], counts.to_vec(), vec![0]].concat());
    let mut scan = vec![components as u8];
    (0..components).for_each(|c| scan.extend([c as u8 + 1, 0]));
    segment(0xDA, &[scan, vec![0, 63, 0]].concat());

    let mut bits: Vec<bool> = Vec::new();
    let mut put = |value: u32, n: u32| (0..n).rev().for_each(|k| bits.push(value >> k & 1 == 1));
    let mut before = [0i32; 4];
    for row in 0..height.div_ceil(8) {
        for col in 0..width.div_ceil(8) {
            for (c, before) in before.iter_mut().enumerate().take(components) {
                let dc = (i32::from(level(col, row, c)) - 128) * 8;
                let difference = dc - *before;
                *before = dc;
                let category = 32 - difference.unsigned_abs().leading_zeros();
                put(category, 4);
                let low = if difference < 0 { difference - 1 } else { difference };
                put(low as u32 & ((1 << category) - 1), category);
                put(0, 1);
            }
        }
    }
    while !bits.len().is_multiple_of(8) {
        bits.push(true);
    }
    for byte in bits.chunks(8).map(|b| b.iter().fold(0u8, |v, bit| v << 1 | u8::from(*bit))) {
        out.push(byte);
        if byte == 0xFF {
            out.push(0);
        }
    }
    out.extend([0xFF, 0xD9]);
    out
}
