//! JPEG pictures: whole files, and the abbreviated streams inside TIFF strips and tiles.

use zune_jpeg::JpegDecoder;
use zune_jpeg::zune_core::bytestream::ZCursor;
use zune_jpeg::zune_core::colorspace::ColorSpace;
use zune_jpeg::zune_core::options::DecoderOptions;

/// A decoded picture, samples side by side.
pub(super) struct Picture {
    pub(super) width: usize,
    pub(super) height: usize,
    pub(super) components: usize,
    pub(super) bytes: Vec<u8>,
}

/// Width, height and components of a JPEG stream.
pub(super) fn header(stream: &[u8]) -> Result<(usize, usize, usize), String> {
    let mut decoder = JpegDecoder::new_with_options(ZCursor::new(stream), options(65_535, 65_535));
    decoder.decode_headers().map_err(|e| format!("JPEG: {e}"))?;
    let info = decoder.info().ok_or("the JPEG has no header")?;
    Ok((info.width.into(), info.height.into(), info.components.into()))
}

/// Decodes a stream of one component as grey, of three as red, green and blue, of two or four as they
/// are stored. Pictures larger than the given size are refused before memory is taken.
pub(super) fn decode(stream: &[u8], most_width: usize, most_height: usize) -> Result<Picture, String> {
    let fail = |e: zune_jpeg::errors::DecodeErrors| format!("JPEG: {e}");
    let mut decoder = JpegDecoder::new_with_options(ZCursor::new(stream), options(most_width, most_height));
    decoder.decode_headers().map_err(fail)?;
    let info = decoder.info().ok_or("the JPEG has no header")?;
    let components = usize::from(info.components);
    let space = match components {
        1 => ColorSpace::Luma,
        3 => ColorSpace::RGB,
        _ => decoder.input_colorspace().ok_or("the JPEG has no header")?,
    };
    decoder.set_options(options(most_width, most_height).jpeg_set_out_colorspace(space));
    let bytes = decoder.decode().map_err(fail)?;
    let (width, height) = (usize::from(info.width), usize::from(info.height));
    if bytes.len() < width * height * components {
        return Err("the JPEG ended before its last row".into());
    }
    Ok(Picture { width, height, components, bytes })
}

fn options(width: usize, height: usize) -> DecoderOptions {
    DecoderOptions::default().set_strict_mode(false).set_max_width(width).set_max_height(height)
}

/// Joins the shared tables of a TIFF image and one chunk into a complete stream. The colour model
/// stands in the TIFF tags, so an “Adobe” marker is put in front to tell the decoder.
pub(super) fn with_tables(
    tables: Option<&[u8]>,
    chunk: &[u8],
    components: usize,
    ycbcr: bool,
) -> Result<Vec<u8>, String> {
    const START: [u8; 2] = [0xFF, 0xD8];
    const END: [u8; 2] = [0xFF, 0xD9];
    let body = chunk.strip_prefix(&START).ok_or("a JPEG chunk must begin with FF D8")?;
    let tables = tables.unwrap_or(&[]);
    let tables = tables.strip_prefix(&START).unwrap_or(tables);
    let tables = tables.strip_suffix(&END).unwrap_or(tables);
    let mut stream = Vec::with_capacity(chunk.len() + tables.len() + 18);
    stream.extend_from_slice(&START);
    stream.extend_from_slice(tables);
    if components >= 3 {
        stream.extend_from_slice(&[0xFF, 0xEE, 0, 14]);
        stream.extend_from_slice(b"Adobe\0\x64\0\0\0\0");
        stream.push(u8::from(ycbcr));
    }
    stream.extend_from_slice(body);
    Ok(stream)
}
