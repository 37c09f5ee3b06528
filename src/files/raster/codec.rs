//! Stored bytes of one strip or tile → its samples, unpacked, in the machine's byte order.

use std::panic::{AssertUnwindSafe, catch_unwind};

use super::jpeg;
use super::layout::{Colour, Compression, Layout, Predictor};
use super::unpack;

/// Decodes one chunk. `rows` is how many rows the chunk stores. The reason of a failure is a
/// sentence without the place; the caller knows that.
///
/// A codec that panics on damaged bytes is caught: the answer is then an error like any other.
pub(super) fn decode(layout: &Layout, stored: &[u8], rows: usize) -> Result<Vec<u8>, String> {
    catch_unwind(AssertUnwindSafe(|| decode_unguarded(layout, stored, rows)))
        .unwrap_or_else(|_| Err(format!("the {:?} decoder gave up on these bytes", layout.compression)))
}

fn decode_unguarded(layout: &Layout, stored: &[u8], rows: usize) -> Result<Vec<u8>, String> {
    let too_big = || "the chunk does not fit in memory".to_owned();
    let row = layout.row_bytes().ok_or_else(too_big)?;
    let need = row.checked_mul(rows).ok_or_else(too_big)?;
    let full = row.checked_mul(layout.chunk_height).ok_or_else(too_big)?;
    let bytes = match layout.compression {
        Compression::None => stored.to_vec(),
        Compression::PackBits => packbits(stored, need)?,
        Compression::Lzw => lzw(stored, need)?,
        Compression::Deflate => deflate(stored, full)?,
        Compression::Zstd => zstd::bulk::decompress(stored, full).map_err(|e| format!("Zstandard: {e}"))?,
        Compression::Jpeg => jpeg_chunk(layout, stored, rows)?,
        Compression::WebP => webp(layout, stored, rows)?,
    };
    if bytes.len() < need {
        return Err(format!("{need} bytes are expected after decoding, {} came out", bytes.len()));
    }
    let mut bytes = bytes;
    bytes.truncate(need);
    let stride = layout.chunk_samples();
    if !layout.bits.is_multiple_of(8) {
        return Ok(unpack::bits(&bytes, layout.chunk_width * stride, row, layout.bits));
    }
    match layout.predictor {
        Predictor::Float => {
            unpack::float_differences(&mut bytes, row, stride, layout.bits / 8);
            return Ok(bytes);
        }
        Predictor::Horizontal => {
            unpack::to_native(&mut bytes, layout.bits / 8, layout.big_endian);
            unpack::horizontal_differences(&mut bytes, row, stride, layout.bits / 8);
        }
        Predictor::None if !matches!(layout.compression, Compression::Jpeg | Compression::WebP) => {
            unpack::to_native(&mut bytes, layout.bits / 8, layout.big_endian);
        }
        Predictor::None => {}
    }
    Ok(bytes)
}

/// Run lengths of bytes: n ≥ 0 copies n + 1 bytes, n < 0 repeats one byte 1 − n times, −128 is idle.
fn packbits(stored: &[u8], need: usize) -> Result<Vec<u8>, String> {
    let mut out = Vec::with_capacity(need);
    let mut rest = stored;
    while out.len() < need {
        let Some((&head, tail)) = rest.split_first() else {
            return Err(format!("PackBits ends after {} of {need} bytes", out.len()));
        };
        let head = head as i8;
        rest = tail;
        if head >= 0 {
            let n = head as usize + 1;
            let (run, tail) = rest.split_at_checked(n).ok_or("PackBits copies past the end of the chunk")?;
            out.extend_from_slice(run);
            rest = tail;
        } else if head != -128 {
            let (&byte, tail) = rest.split_first().ok_or("PackBits repeats past the end of the chunk")?;
            out.resize(out.len() + (1 - isize::from(head)) as usize, byte);
            rest = tail;
        }
    }
    Ok(out)
}

fn lzw(stored: &[u8], need: usize) -> Result<Vec<u8>, String> {
    if let [0, second, ..] = stored
        && second & 1 == 1
    {
        return Err("this is the LZW of TIFF before version 6 (reversed bits), which is not read".into());
    }
    // The stream may lack its end code; it is over once the chunk is full.
    let mut decoder = weezl::decode::Configuration::with_tiff_size_switch(weezl::BitOrder::Msb, 8)
        .with_yield_on_full_buffer(true)
        .build();
    let mut out = vec![0; need];
    let (mut used, mut made) = (0, 0);
    while made < need {
        let step = decoder.decode_bytes(&stored[used..], &mut out[made..]);
        used += step.consumed_in;
        made += step.consumed_out;
        match step.status {
            Ok(weezl::LzwStatus::Done) => break,
            Ok(_) if step.consumed_in + step.consumed_out == 0 => break,
            Ok(_) => {}
            Err(e) => return Err(format!("LZW: {e}")),
        }
    }
    out.truncate(made);
    Ok(out)
}

fn deflate(stored: &[u8], full: usize) -> Result<Vec<u8>, String> {
    let mut out = vec![0; full];
    let made = libdeflater::Decompressor::new().zlib_decompress(stored, &mut out).map_err(|e| match e {
        libdeflater::DecompressionError::BadData => "the Deflate stream is damaged".to_owned(),
        libdeflater::DecompressionError::InsufficientSpace => {
            format!("the Deflate stream holds more than the {full} bytes of a chunk")
        }
    })?;
    out.truncate(made);
    Ok(out)
}

fn jpeg_chunk(layout: &Layout, stored: &[u8], rows: usize) -> Result<Vec<u8>, String> {
    let components = layout.chunk_samples();
    let ycbcr = layout.colour == Colour::YCbCr;
    let stream = jpeg::with_tables(layout.jpeg_tables.as_deref(), stored, components, ycbcr)?;
    let picture = jpeg::decode(&stream, layout.chunk_width, layout.chunk_height)?;
    if picture.width != layout.chunk_width || picture.height < rows || picture.components != components {
        return Err(format!(
            "{} × {rows} pixels of {components} samples are expected, the JPEG holds {} × {} of {}",
            layout.chunk_width, picture.width, picture.height, picture.components
        ));
    }
    Ok(picture.bytes)
}

fn webp(layout: &Layout, stored: &[u8], rows: usize) -> Result<Vec<u8>, String> {
    let fail = |e: image_webp::DecodingError| format!("WebP: {e}");
    let mut decoder = image_webp::WebPDecoder::new(std::io::Cursor::new(stored)).map_err(fail)?;
    let (width, height) = decoder.dimensions();
    let wanted = layout.chunk_samples();
    if width as usize != layout.chunk_width
        || (height as usize) < rows
        || height as usize > layout.chunk_height
    {
        let want = layout.chunk_width;
        return Err(format!("{want} × {rows} pixels are expected, the WebP picture is {width} × {height}"));
    }
    let held = if decoder.has_alpha() { 4 } else { 3 };
    let size = decoder.output_buffer_size().ok_or("the WebP picture does not fit in memory")?;
    decoder.set_memory_limit(size.saturating_mul(4));
    let mut bytes = vec![0; size];
    decoder.read_image(&mut bytes).map_err(fail)?;
    match (held, wanted) {
        (3, 3) | (4, 4) => Ok(bytes),
        // An opaque picture may have dropped its alpha.
        (3, 4) => Ok(bytes.chunks_exact(3).flat_map(|p| [p[0], p[1], p[2], 255]).collect()),
        _ => Err(format!("{wanted} samples per pixel are expected, the WebP picture has {held}")),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn packbits_follows_the_example_of_the_format() {
        let stored =
            [0xFE, 0xAA, 0x02, 0x80, 0x00, 0x2A, 0xFD, 0xAA, 0x03, 0x80, 0x00, 0x2A, 0x22, 0xF7, 0xAA];
        let want = [
            0xAA, 0xAA, 0xAA, 0x80, 0x00, 0x2A, 0xAA, 0xAA, 0xAA, 0xAA, 0x80, 0x00, 0x2A, 0x22, 0xAA, 0xAA,
            0xAA, 0xAA, 0xAA, 0xAA, 0xAA, 0xAA, 0xAA, 0xAA,
        ];
        assert_eq!(packbits(&stored, want.len()).unwrap(), want);
        assert!(packbits(&stored[..5], want.len()).is_err());
    }
}
