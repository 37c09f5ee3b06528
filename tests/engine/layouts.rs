//! Every TIFF layout this program claims to read, written by the test and read back: byte orders, strips and tiles,
//! planes, sample types, codecs, predictors, palettes, opacity, scaling, left-out chunks.

use std::io::Cursor;
use std::path::Path;

use ventifact::files::raster::{Bands, Limits, Raster, RasterError, SampleType, Window};
use ventifact::ground::{Grid, Work};

use crate::tiff_writer::{Codec, Extra, Kind, Recipe, write};

const KINDS: [(Kind, SampleType); 9] = [
    (Kind { format: 1, bits: 8 }, SampleType::U8),
    (Kind { format: 2, bits: 8 }, SampleType::I8),
    (Kind { format: 1, bits: 16 }, SampleType::U16),
    (Kind { format: 2, bits: 16 }, SampleType::I16),
    (Kind { format: 1, bits: 32 }, SampleType::U32),
    (Kind { format: 2, bits: 32 }, SampleType::I32),
    (Kind { format: 3, bits: 16 }, SampleType::F16),
    (Kind { format: 3, bits: 32 }, SampleType::F32),
    (Kind { format: 3, bits: 64 }, SampleType::F64),
];

/// A value that the type holds exactly, different at every place.
fn value(kind: Kind, col: usize, row: usize, sample: usize) -> f64 {
    let n = (col * 5 + row * 7 + sample * 31) as f64;
    match (kind.format, kind.bits) {
        (1, bits @ 1..=15) => n % f64::from(1u32 << bits),
        (2, 8) => n % 256.0 - 128.0,
        (1, _) => n * 3.0,
        (2, _) => (n - 150.0) * 3.0,
        (_, 16) => (n - 150.0) / 4.0,
        _ => (n - 150.0) * 0.375,
    }
}

fn open(folder: &Path, bytes: &[u8]) -> Result<Raster, RasterError> {
    let path = folder.join("a.tif");
    std::fs::write(&path, bytes).expect("writes");
    Raster::open(&path, &Limits::default())
}

fn whole(raster: &Raster, band: usize) -> Grid<f32> {
    let (width, height) = (raster.info().width, raster.info().height);
    raster.read(0, Window::whole(width, height), &Bands::One(band), &Work::quiet()).expect("reads")
}

#[test]
fn all_layouts_types_codecs_and_predictors_read_back() {
    let folder = tempfile::tempdir().expect("a folder");
    let mut tried = 0;
    for (kind, sample) in KINDS {
        for codec in
            [Codec::None, Codec::PackBits, Codec::Lzw, Codec::Deflate, Codec::OldDeflate, Codec::Zstd]
        {
            for predictor in 1..=3 {
                let differenced =
                    matches!(codec, Codec::Lzw | Codec::Deflate | Codec::OldDeflate | Codec::Zstd);
                if predictor > 1 && !differenced || predictor == 3 && kind.format != 3 {
                    continue;
                }
                for shape in 0..16u8 {
                    let bit = |k: u8| shape >> k & 1 == 1;
                    let recipe = Recipe {
                        kind,
                        codec,
                        predictor,
                        big_endian: bit(0),
                        big_tiff: bit(1),
                        tile: bit(2).then_some((16, 16)),
                        planar: bit(3),
                        samples: if bit(1) { 3 } else { 2 },
                        more: vec![(338, Extra::Short(vec![0; if bit(1) { 2 } else { 1 }]))],
                        ..Recipe::default()
                    };
                    check(folder.path(), &recipe, sample);
                    tried += 1;
                }
            }
        }
    }
    assert_eq!(tried, 16 * (9 * 6 + 9 * 4 + 3 * 4), "layouts tried");
}

fn check(folder: &Path, recipe: &Recipe, sample: SampleType) {
    let at = |c, r, s| value(recipe.kind, c, r, s);
    let bytes = write(recipe, at);
    let raster = open(folder, &bytes).unwrap_or_else(|e| panic!("{recipe:?}: {e}"));
    assert_eq!(raster.info().sample, sample);
    for band in 0..recipe.samples {
        let grid = whole(&raster, band);
        assert_eq!(grid.valid_count(), grid.len());
        for row in 0..recipe.height {
            for col in 0..recipe.width {
                assert_eq!(
                    f64::from(grid.at(col, row)),
                    at(col, row, band),
                    "{recipe:?} band {band} at {col}, {row}"
                );
            }
        }
    }
}

/// The `tiff` crate as a second reader of what the test writer writes, so that reader and writer cannot share a
/// misunderstanding. It reads chunky layouts without compression here.
#[test]
fn the_test_writer_agrees_with_another_reader() {
    use tiff::decoder::{Decoder, DecodingResult};
    let mut agreed = 0;
    for (kind, _) in KINDS {
        for shape in 0..8u8 {
            let recipe = Recipe {
                kind,
                big_endian: shape & 1 == 1,
                big_tiff: shape & 2 == 2,
                tile: (shape & 4 == 4).then_some((16, 16)),
                ..Recipe::default()
            };
            let bytes = write(&recipe, |c, r, s| value(kind, c, r, s));
            let mut decoder = Decoder::new(Cursor::new(bytes)).expect("opens");
            let values: Vec<f64> = match decoder.read_image().expect("reads") {
                DecodingResult::U8(v) => v.into_iter().map(f64::from).collect(),
                DecodingResult::I8(v) => v.into_iter().map(f64::from).collect(),
                DecodingResult::U16(v) => v.into_iter().map(f64::from).collect(),
                DecodingResult::I16(v) => v.into_iter().map(f64::from).collect(),
                DecodingResult::U32(v) => v.into_iter().map(f64::from).collect(),
                DecodingResult::I32(v) => v.into_iter().map(f64::from).collect(),
                DecodingResult::F16(v) => v.into_iter().map(f64::from).collect(),
                DecodingResult::F32(v) => v.into_iter().map(f64::from).collect(),
                DecodingResult::F64(v) => v,
                _ => panic!("an unexpected type"),
            };
            let want: Vec<f64> = (0..29)
                .flat_map(|r| (0..37).map(move |c| (c, r)))
                .map(|(c, r)| value(kind, c, r, 0))
                .collect();
            assert_eq!(values, want, "{recipe:?}");
            agreed += 1;
        }
    }
    assert_eq!(agreed, 72);
}

#[test]
fn narrow_fields_read_back() {
    let folder = tempfile::tempdir().expect("a folder");
    for bits in [1, 2, 4, 5, 10, 12, 14] {
        for codec in [Codec::None, Codec::Lzw, Codec::Deflate] {
            for shape in 0..4u8 {
                let recipe = Recipe {
                    kind: Kind { format: 1, bits },
                    codec,
                    tile: (shape & 1 == 1).then_some((16, 16)),
                    planar: shape & 2 == 2,
                    samples: 3,
                    photometric: 2,
                    ..Recipe::default()
                };
                check(folder.path(), &recipe, if bits > 8 { SampleType::U16 } else { SampleType::U8 });
            }
        }
    }
}

#[test]
fn a_large_plain_strip_is_read_in_parts() {
    let folder = tempfile::tempdir().expect("a folder");
    let recipe = Recipe { width: 1100, height: 2100, rows: 2100, ..Recipe::default() };
    let bytes = write(&recipe, |c, r, s| value(recipe.kind, c, r, s));
    let raster = open(folder.path(), &bytes).expect("opens");
    assert_eq!(raster.info().layout, "strips of 953 rows");
    let window = Window { col: 1000, row: 900, width: 99, height: 1199 };
    let grid = raster.read(0, window, &Bands::One(0), &Work::quiet()).expect("reads");
    for (row, col) in [(0, 0), (53, 5), (54, 98), (1198, 98)] {
        assert_eq!(f64::from(grid.at(col, row)), value(recipe.kind, col + 1000, row + 900, 0));
    }
}

#[test]
fn palettes_become_three_bands() {
    let folder = tempfile::tempdir().expect("a folder");
    let map: Vec<u16> = (0..3u16).flat_map(|c| (0..256u16).map(move |i| (i ^ (c * 85)) * 257)).collect();
    let recipe = Recipe {
        photometric: 3,
        more: vec![(320, Extra::Short(map)), (42113, Extra::Text("9".into()))],
        ..Recipe::default()
    };
    let index = |c: usize, r: usize| (c * 7 + r) % 256;
    let raster = open(folder.path(), &write(&recipe, |c, r, _| index(c, r) as f64)).expect("opens");
    let names: Vec<&str> = raster.info().bands.iter().map(|b| b.label.as_str()).collect();
    assert_eq!(names, ["red (palette)", "green (palette)", "blue (palette)"]);
    for band in 0..3 {
        let grid = whole(&raster, band);
        for (col, row) in [(0, 0), (9, 0), (36, 28), (20, 3)] {
            let want = (index(col, row) != 9).then(|| (index(col, row) ^ (band * 85)) as f32);
            assert_eq!(grid.get(col, row), want, "band {band} at {col}, {row}");
        }
    }
}

#[test]
fn opacity_scaling_and_left_out_chunks_make_the_mask() {
    let folder = tempfile::tempdir().expect("a folder");
    let xml = "<M><Item name=\"SCALE\" sample=\"0\" role=\"scale\">0.5</Item>\
               <Item name=\"OFFSET\" sample=\"0\" role=\"offset\">-3</Item>\
               <Item name=\"SUN_AZIMUTH\">131.5</Item></M>";
    for planar in [false, true] {
        let recipe = Recipe {
            samples: 2,
            planar,
            tile: Some((16, 16)),
            codec: Codec::Deflate,
            more: vec![(338, Extra::Short(vec![2])), (42112, Extra::Text(xml.into()))],
            sparse: 4..5,
            ..Recipe::default()
        };
        let bytes = write(
            &recipe,
            |c, r, s| if s == 1 { f64::from(u8::from(c != 3)) * 255.0 } else { (c + r) as f64 },
        );
        let raster = open(folder.path(), &bytes).expect("opens");
        assert_eq!((raster.info().bands.len(), raster.info().alpha), (1, true));
        assert_eq!(raster.info().light.and_then(|l| l.sun_azimuth).map(|a| a.deg()), Some(131.5));
        let grid = whole(&raster, 0);
        for row in 0..29 {
            for col in 0..37 {
                let left_out = (16..32).contains(&col) && row >= 16;
                let want = (col != 3 && !left_out).then(|| (col + row) as f32 * 0.5 - 3.0);
                assert_eq!(grid.get(col, row), want, "planar {planar}: {col}, {row}");
            }
        }
    }
}

#[test]
fn nodata_is_understood_as_it_is_written() {
    let folder = tempfile::tempdir().expect("a folder");
    let f32_kind = Kind { format: 3, bits: 32 };
    let u8_kind = Kind { format: 1, bits: 8 };
    for (kind, text, stored, missing, caution) in [
        (f32_kind, "nan", f64::NAN, true, None),
        (f32_kind, "-3.4028234663852886e+38", f64::from(f32::MIN), true, None),
        (f32_kind, "-3.40282306073709653e+38", f64::from(-3.402_823e38_f32), true, None),
        (f32_kind, "-9999", -9999.0, true, None),
        (f32_kind, "-9999.1", f64::from(-9999.1f32), true, None),
        (f32_kind, "-1.79769313486232e+308", 5.0, false, None),
        (u8_kind, "0", 0.0, true, None),
        (u8_kind, " 255 ", 255.0, true, None),
        (u8_kind, "-9999", 241.0, false, Some("nodata-impossible")),
        (u8_kind, "nan", 0.0, false, Some("nodata-impossible")),
        (u8_kind, "nothing", 0.0, false, Some("nodata-unreadable")),
    ] {
        let recipe = Recipe { kind, more: vec![(42113, Extra::Text(text.into()))], ..Recipe::default() };
        let bytes = write(&recipe, |c, r, _| if (c, r) == (5, 5) { stored } else { 77.0 });
        let raster = open(folder.path(), &bytes).expect("opens");
        let grid = whole(&raster, 0);
        assert_eq!(grid.is_valid(5, 5), !missing, "“{text}”");
        assert_eq!(grid.valid_count(), grid.len() - usize::from(missing), "“{text}”");
        assert_eq!(raster.info().cautions.first().map(|c| c.code), caution, "“{text}”");
    }
}

#[test]
fn mixes_are_weighted_sums_and_missing_where_any_band_is() {
    let folder = tempfile::tempdir().expect("a folder");
    let recipe = Recipe {
        samples: 3,
        photometric: 2,
        codec: Codec::Lzw,
        more: vec![(42113, Extra::Text("200".into()))],
        ..Recipe::default()
    };
    let at = |c: usize, r: usize, s: usize| {
        if (c, r, s) == (2, 1, 1) { 200.0 } else { (c + 2 * r + 50 * s) as f64 }
    };
    let raster = open(folder.path(), &write(&recipe, at)).expect("opens");
    let mix = Bands::Mix(vec![(0, 0.25), (1, -1.5), (2, 0.5)]);
    let window = Window { col: 1, row: 1, width: 20, height: 20 };
    let grid = raster.read(0, window, &mix, &Work::quiet()).expect("reads");
    assert_eq!((grid.valid_count(), grid.get(1, 0)), (399, None));
    assert_eq!(f64::from(grid.at(4, 6)), 0.25 * at(5, 7, 0) - 1.5 * at(5, 7, 1) + 0.5 * at(5, 7, 2));
    assert!(raster.read(0, window, &Bands::Mix(vec![(0, 1.0), (3, 1.0)]), &Work::quiet()).is_err());
}

#[test]
fn kinds_this_program_does_not_read_are_refused_by_name() {
    let folder = tempfile::tempdir().expect("a folder");
    for (tag, code, word) in [
        (259, 34887, "LERC"),
        (259, 34925, "LZMA"),
        (259, 34712, "JPEG 2000"),
        (259, 4, "CCITT"),
        (259, 6, "old-style JPEG"),
        (262, 8, "L*a*b*"),
        (262, 32803, "mosaic"),
        (339, 6, "complex"),
        (258, 24, "24 bits"),
        (266, 2, "least significant"),
    ] {
        let recipe = Recipe { more: vec![(266, Extra::Short(vec![1]))], ..Recipe::default() };
        let mut bytes = write(&recipe, |_, _, _| 1.0);
        let start = u32::from_le_bytes(bytes[4..8].try_into().expect("four")) as usize;
        let count = usize::from(u16::from_le_bytes([bytes[start], bytes[start + 1]]));
        let entry = (0..count)
            .map(|i| start + 2 + 12 * i)
            .find(|e| bytes[*e..e + 2] == u16::to_le_bytes(tag))
            .expect("tag");
        bytes[entry + 8..entry + 10].copy_from_slice(&u16::to_le_bytes(code));
        let error = open(folder.path(), &bytes).expect_err("refused");
        assert!(matches!(error, RasterError::Unsupported { .. }), "{error}");
        assert!(error.to_string().contains(word), "{error} should say {word}");
    }
}
