//! Damaged and absurd raster files: an error or the right pixels, never a panic, never memory past the limits, never
//! an endless loop.

use std::path::Path;
use std::time::{Duration, Instant};

use rand::{Rng, SeedableRng};
use rand_chacha::ChaCha8Rng;
use ventifact::files::raster::{Bands, Limits, Raster, RasterError, Window};
use ventifact::ground::Work;

use crate::jpeg_writer;
use crate::tiff_writer::{Codec, Extra, Kind, Recipe, write};

/// Small enough that a hostile header cannot take much before it is refused.
fn limits() -> Limits {
    Limits {
        pixels_per_read: 1 << 20,
        chunk_bytes: 1 << 22,
        directories: 16,
        entries: 200,
        chunks: 1 << 16,
        tag_bytes: 1 << 16,
        ..Limits::default()
    }
}

/// Opens and reads all that can be read. Whether that works is the file's affair; that it ends is ours.
fn exercise(path: &Path, bytes: &[u8]) -> Result<(), RasterError> {
    std::fs::write(path, bytes).expect("writes");
    let raster = Raster::open(path, &limits())?;
    let work = Work::quiet();
    let info = raster.info();
    for level in 0..info.levels.len() {
        let size = info.levels[level];
        let window = Window::whole(size.width.min(300), size.height.min(300));
        raster.read(level, window, &Bands::One(0), &work)?;
        raster.read(level, window, &Bands::Mix((0..info.bands.len()).map(|b| (b, 0.5)).collect()), &work)?;
    }
    let view = Window::whole(info.width.min(2000), info.height.min(2000));
    raster.read_reduced(view, 7, &Bands::One(0), &work)?;
    Ok(())
}

/// One small file of every codec and arrangement.
fn samples() -> Vec<(&'static str, Vec<u8>)> {
    let map: Vec<u16> = (0..768).map(|i| i * 85).collect();
    let base = Recipe { width: 40, height: 33, tile: Some((16, 16)), ..Recipe::default() };
    let float = Kind { format: 3, bits: 32 };
    let tiff = |recipe: &Recipe| write(recipe, |c, r, s| (c * 3 + r + s * 9) as f64 % 250.0);
    let jpeg =
        |components: usize| jpeg_writer::write(40, 33, components, |c, r, k| (c * 20 + r * 9 + k * 50) as u8);
    vec![
        ("none.tif", tiff(&Recipe { tile: None, big_endian: true, ..base.clone() })),
        (
            "packbits.tif",
            tiff(&Recipe { codec: Codec::PackBits, samples: 3, photometric: 2, ..base.clone() }),
        ),
        (
            "lzw.tif",
            tiff(&Recipe { codec: Codec::Lzw, predictor: 2, planar: true, samples: 2, ..base.clone() }),
        ),
        (
            "deflate.tif",
            tiff(&Recipe {
                codec: Codec::Deflate,
                predictor: 3,
                kind: float,
                big_tiff: true,
                ..base.clone()
            }),
        ),
        (
            "zstd.tif",
            tiff(&Recipe {
                codec: Codec::Zstd,
                kind: Kind { format: 2, bits: 16 },
                predictor: 2,
                ..base.clone()
            }),
        ),
        (
            "bits.tif",
            tiff(&Recipe { kind: Kind { format: 1, bits: 12 }, samples: 3, photometric: 2, ..base.clone() }),
        ),
        (
            "palette.tif",
            tiff(&Recipe { photometric: 3, more: vec![(320, Extra::Short(map))], ..base.clone() }),
        ),
        ("alpha.tif", {
            let text = "<Item name=\"x\" sample=\"0\" role=\"scale\">2</Item>".to_owned();
            let more = vec![
                (338, Extra::Short(vec![1])),
                (42112, Extra::Text(text)),
                (42113, Extra::Text("3".into())),
            ];
            tiff(&Recipe { samples: 2, more, ..base.clone() })
        }),
        ("webp.tif", chunked(&webp(), 50001, 3)),
        ("jpeg.tif", chunked(&jpeg(3), 7, 3)),
        ("grey.jpg", jpeg(1)),
        ("colour.jpg", jpeg(3)),
        ("grey.png", png(png::ColorType::Grayscale, png::BitDepth::Sixteen)),
        ("alpha.png", png(png::ColorType::Rgba, png::BitDepth::Eight)),
        ("palette.png", png(png::ColorType::Indexed, png::BitDepth::Four)),
    ]
}

fn webp() -> Vec<u8> {
    let mut out = Vec::new();
    let pixels: Vec<u8> = (0..40 * 33 * 3).map(|i| (i * 7 % 251) as u8).collect();
    image_webp::WebPEncoder::new(&mut out)
        .encode(&pixels, 40, 33, image_webp::ColorType::Rgb8)
        .expect("encodes");
    out
}

/// A TIFF whose only strip is a finished picture.
fn chunked(picture: &[u8], code: u16, samples: usize) -> Vec<u8> {
    let recipe = Recipe { width: 40, height: 33, rows: 33, samples, photometric: 2, ..Recipe::default() };
    let mut bytes = write(&recipe, |_, _, _| 0.0);
    let at = bytes.len() as u32;
    for (tag, value) in [(259u16, u32::from(code)), (273, at), (279, picture.len() as u32)] {
        set(&mut bytes, tag, value);
    }
    bytes.extend(picture);
    bytes
}

/// Overwrites the value of a tag of a little-endian classic file.
fn set(bytes: &mut [u8], tag: u16, value: u32) {
    let start = u32::from_le_bytes(bytes[4..8].try_into().expect("four")) as usize;
    let count = usize::from(u16::from_le_bytes([bytes[start], bytes[start + 1]]));
    let entry = (0..count)
        .map(|i| start + 2 + 12 * i)
        .find(|e| bytes[*e..e + 2] == tag.to_le_bytes())
        .expect("the tag");
    if bytes[entry + 2] == 3 {
        bytes[entry + 8..entry + 10].copy_from_slice(&(value as u16).to_le_bytes());
    } else {
        bytes[entry + 8..entry + 12].copy_from_slice(&value.to_le_bytes());
    }
}

fn png(color: png::ColorType, depth: png::BitDepth) -> Vec<u8> {
    let mut out = Vec::new();
    let mut encoder = png::Encoder::new(&mut out, 40, 33);
    encoder.set_color(color);
    encoder.set_depth(depth);
    if color == png::ColorType::Indexed {
        encoder.set_palette((0..48).collect::<Vec<u8>>());
    }
    let row = (40 * color.samples() * depth as usize).div_ceil(8);
    let pixels: Vec<u8> = (0..row * 33).map(|i| (i * 13 % 256) as u8).collect();
    let mut writer = encoder.write_header().expect("header");
    writer.write_image_data(&pixels).expect("pixels");
    writer.finish().expect("end");
    out
}

#[test]
fn sound_samples_read() {
    let folder = tempfile::tempdir().expect("a folder");
    for (name, bytes) in samples() {
        exercise(&folder.path().join(name), &bytes).unwrap_or_else(|e| panic!("{name}: {e}"));
    }
}

#[test]
fn jpeg_levels_come_back_as_stored() {
    let folder = tempfile::tempdir().expect("a folder");
    let levels = |c: usize, r: usize, k: usize| (c * 20 + r * 9 + k * 50) as u8;
    let grey = folder.path().join("grey.jpg");
    std::fs::write(&grey, jpeg_writer::write(40, 33, 1, levels)).expect("writes");
    let inside = folder.path().join("rgb.tif");
    std::fs::write(&inside, chunked(&jpeg_writer::write(40, 33, 3, levels), 7, 3)).expect("writes");
    for (path, bands) in [(grey, 1), (inside, 3)] {
        let raster = Raster::open(&path, &Limits::default()).expect("opens");
        for band in 0..bands {
            let grid =
                raster.read(0, Window::whole(40, 33), &Bands::One(band), &Work::quiet()).expect("reads");
            for (col, row) in [(0, 0), (39, 32), (17, 9), (8, 31)] {
                assert_eq!(
                    grid.at(col, row),
                    f32::from(levels(col / 8, row / 8, band)),
                    "{} {col}, {row}",
                    path.display()
                );
            }
        }
    }
}

#[test]
fn truncated_files_end_in_an_error_or_in_pixels() {
    let folder = tempfile::tempdir().expect("a folder");
    let start = Instant::now();
    for (name, bytes) in samples() {
        let path = folder.path().join(name);
        let step = (bytes.len() / 60).max(1);
        for keep in (0..bytes.len()).step_by(step) {
            let _ = exercise(&path, &bytes[..keep]);
        }
        assert!(
            exercise(&path, &bytes[..bytes.len() / 2]).is_err(),
            "half of {name} cannot be all of its pixels"
        );
    }
    assert!(start.elapsed() < Duration::from_secs(120));
}

#[test]
fn mutated_files_end_in_an_error_or_in_pixels() {
    let folder = tempfile::tempdir().expect("a folder");
    let rounds: u64 = std::env::var("HOSTILE_ROUNDS").ok().and_then(|n| n.parse().ok()).unwrap_or(60);
    for (name, bytes) in samples() {
        let path = folder.path().join(name);
        for round in 0..rounds {
            let mut random = ChaCha8Rng::seed_from_u64(round);
            let mut broken = bytes.clone();
            for _ in 0..random.random_range(1..6) {
                // The header and the directory matter most, and they stand at both ends.
                let near = match random.random_range(0..3) {
                    0 => random.random_range(0..bytes.len().min(64)),
                    1 => bytes.len() - 1 - random.random_range(0..bytes.len().min(300)),
                    _ => random.random_range(0..bytes.len()),
                };
                broken[near] = match random.random_range(0..4) {
                    0 => 0xFF,
                    1 => 0,
                    2 => broken[near] ^ 1 << random.random_range(0..8),
                    _ => random.random(),
                };
            }
            let _ = exercise(&path, &broken);
        }
    }
}

#[test]
fn absurd_headers_are_refused_before_memory_is_taken() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("absurd.tif");
    let tiled = Recipe { tile: Some((16, 16)), codec: Codec::Deflate, ..Recipe::default() };
    let striped = Recipe { rows: 29, codec: Codec::Deflate, ..Recipe::default() };
    for (recipe, tag, value) in [
        (&tiled, 256, u32::MAX),
        (&tiled, 257, u32::MAX),
        (&tiled, 322, 0xFFFF),
        (&tiled, 277, 0xFFFF),
        (&striped, 256, u32::MAX),
        (&striped, 278, 0),
        (&striped, 257, u32::MAX),
    ] {
        let mut bytes = write(recipe, |c, _, _| c as f64);
        set(&mut bytes, tag, value);
        let before = Instant::now();
        let result = exercise(&path, &bytes);
        assert!(tag == 278 || result.is_err(), "tag {tag} = {value}");
        assert!(before.elapsed() < Duration::from_secs(5), "tag {tag} = {value}");
    }
}

#[test]
fn a_chain_of_directories_that_bites_its_tail_is_refused() {
    let folder = tempfile::tempdir().expect("a folder");
    let mut bytes = write(&Recipe::default(), |c, _, _| c as f64);
    let start: [u8; 4] = bytes[4..8].try_into().expect("four");
    let end = bytes.len() - 4;
    bytes[end..].copy_from_slice(&start);
    let error = exercise(&folder.path().join("loop.tif"), &bytes).expect_err("refused");
    assert!(error.to_string().contains("back"), "{error}");
}

#[test]
fn files_of_other_kinds_are_refused_with_a_reason() {
    let folder = tempfile::tempdir().expect("a folder");
    for (name, bytes) in [
        ("empty.tif", &b""[..]),
        ("text.tif", b"not a raster at all"),
        ("short.tif", b"II"),
        ("gif.png", b"GIF89a"),
    ] {
        let error = exercise(&folder.path().join(name), bytes).expect_err("refused");
        assert!(
            matches!(error, RasterError::Malformed { .. } | RasterError::Unsupported { .. }),
            "{name}: {error}"
        );
    }
    let missing = Raster::open(&folder.path().join("none.tif"), &Limits::default()).expect_err("absent");
    assert!(matches!(missing, RasterError::Io { .. }), "{missing}");
    let a_folder = Raster::open(folder.path(), &Limits::default()).expect_err("a folder");
    assert!(!matches!(a_folder, RasterError::Stopped(_)), "{a_folder}");
}
