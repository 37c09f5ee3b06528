//! Writes small TIFF files of every layout, for the reader to be tried on. Nothing is clever here: each
//! sample goes through an `f64`, each chunk through one encoder.

/// What to write.
#[derive(Clone, Debug)]
pub struct Recipe {
    pub width: usize,
    pub height: usize,
    pub samples: usize,
    pub kind: Kind,
    pub big_endian: bool,
    pub big_tiff: bool,
    /// Tile size; otherwise strips of `rows` rows.
    pub tile: Option<(usize, usize)>,
    pub rows: usize,
    pub planar: bool,
    pub codec: Codec,
    pub predictor: u16,
    pub photometric: u16,
    /// Further tags: number, values as 16-bit numbers or text.
    pub more: Vec<(u16, Extra)>,
    /// Chunks left out (offset and count zero).
    pub sparse: std::ops::Range<usize>,
}

/// Value of a further tag.
#[derive(Clone, Debug)]
pub enum Extra {
    Short(Vec<u16>),
    Text(String),
}

/// Sample type as format number and bits.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Kind {
    pub format: u16,
    pub bits: usize,
}

#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Codec {
    None,
    PackBits,
    Lzw,
    Deflate,
    OldDeflate,
    Zstd,
}

impl Default for Recipe {
    fn default() -> Self {
        Self {
            width: 37,
            height: 29,
            samples: 1,
            kind: Kind { format: 1, bits: 8 },
            big_endian: false,
            big_tiff: false,
            tile: None,
            rows: 7,
            planar: false,
            codec: Codec::None,
            predictor: 1,
            photometric: 1,
            more: Vec::new(),
            sparse: 0..0,
        }
    }
}

impl Codec {
    fn code(self) -> u16 {
        match self {
            Self::None => 1,
            Self::PackBits => 32773,
            Self::Lzw => 5,
            Self::Deflate => 8,
            Self::OldDeflate => 32946,
            Self::Zstd => 50000,
        }
    }

    fn encode(self, bytes: &[u8]) -> Vec<u8> {
        match self {
            Self::None => bytes.to_vec(),
            // Literal runs, and one repeat when a run is long enough.
            Self::PackBits => {
                let mut out = Vec::new();
                let mut rest = bytes;
                while let Some(first) = rest.first() {
                    let same = rest.iter().take(128).take_while(|b| *b == first).count();
                    if same > 2 {
                        out.extend([(1 - same as i32) as u8, *first]);
                        rest = &rest[same..];
                    } else {
                        let n = rest.len().min(100);
                        out.push(n as u8 - 1);
                        out.extend(&rest[..n]);
                        rest = &rest[n..];
                    }
                }
                out
            }
            Self::Lzw => weezl::encode::Encoder::with_tiff_size_switch(weezl::BitOrder::Msb, 8)
                .encode(bytes)
                .expect("encodes"),
            Self::Deflate | Self::OldDeflate => {
                let mut compressor = libdeflater::Compressor::new(libdeflater::CompressionLvl::default());
                let mut out = vec![0; compressor.zlib_compress_bound(bytes.len())];
                let size = compressor.zlib_compress(bytes, &mut out).expect("fits");
                out.truncate(size);
                out
            }
            Self::Zstd => zstd::bulk::compress(bytes, 3).expect("encodes"),
        }
    }
}

/// The file's bytes, its samples given by `value(col, row, sample)`.
pub fn write(recipe: &Recipe, value: impl Fn(usize, usize, usize) -> f64) -> Vec<u8> {
    let (cw, ch) = recipe.tile.unwrap_or((recipe.width, recipe.rows.min(recipe.height)));
    let mut chunks = Vec::new();
    for plane in 0..if recipe.planar { recipe.samples } else { 1 } {
        for top in (0..recipe.height).step_by(ch) {
            for left in (0..recipe.width).step_by(cw) {
                let rows = if recipe.tile.is_some() { ch } else { ch.min(recipe.height - top) };
                let lanes = if recipe.planar { plane..plane + 1 } else { 0..recipe.samples };
                let row = |r: usize| {
                    let at = |c: usize, s: usize| {
                        let inside = left + c < recipe.width && top + r < recipe.height;
                        if inside { value(left + c, top + r, s) } else { 0.0 }
                    };
                    let lanes = &lanes;
                    let samples: Vec<f64> = (0..cw)
                        .flat_map(|c| lanes.clone().map(move |s| (c, s)))
                        .map(|(c, s)| at(c, s))
                        .collect();
                    packed(recipe, &samples, lanes.len())
                };
                if recipe.sparse.contains(&chunks.len()) {
                    chunks.push(Vec::new());
                    continue;
                }
                let bytes: Vec<u8> = (0..rows).flat_map(row).collect();
                chunks.push(recipe.codec.encode(&bytes));
            }
        }
    }
    assemble(recipe, &chunks, (cw, ch))
}

/// One row of samples: predicted, in the file's byte order, packed.
fn packed(recipe: &Recipe, samples: &[f64], lanes: usize) -> Vec<u8> {
    let Kind { format, bits } = recipe.kind;
    if !bits.is_multiple_of(8) {
        let mut out = Vec::new();
        let (mut held, mut count) = (0u64, 0);
        for v in samples {
            held = held << bits | *v as u64;
            count += bits;
            while count >= 8 {
                count -= 8;
                out.push((held >> count) as u8);
            }
        }
        if count > 0 {
            out.push((held << (8 - count)) as u8);
        }
        return out;
    }
    let width = bits / 8;
    // The bit pattern of each sample, as an unsigned number.
    let pattern = |v: f64| -> u64 {
        match (format, bits) {
            (1, _) => v as u64,
            (2, _) => v as i64 as u64,
            (3, 16) => u64::from(half::f16::from_f64(v).to_bits()),
            (3, 32) => u64::from((v as f32).to_bits()),
            _ => v.to_bits(),
        }
    };
    let patterns: Vec<u64> = samples.iter().map(|v| pattern(*v)).collect();
    let big = |v: u64| v.to_be_bytes()[8 - width..].to_vec();
    if recipe.predictor == 3 {
        let mut planes: Vec<u8> = (0..width).flat_map(|k| patterns.iter().map(move |p| big(*p)[k])).collect();
        for i in (lanes..planes.len()).rev() {
            planes[i] = planes[i].wrapping_sub(planes[i - lanes]);
        }
        return planes;
    }
    let difference = |i: usize| {
        let before = if recipe.predictor == 2 && i >= lanes { patterns[i - lanes] } else { 0 };
        patterns[i].wrapping_sub(before)
    };
    (0..patterns.len())
        .flat_map(|i| {
            let mut bytes = big(difference(i));
            if !recipe.big_endian {
                bytes.reverse();
            }
            bytes
        })
        .collect()
}

/// Header, chunks, tag values, directory.
fn assemble(recipe: &Recipe, chunks: &[Vec<u8>], (cw, ch): (usize, usize)) -> Vec<u8> {
    let big = recipe.big_endian;
    let number = |v: u64, width: usize| -> Vec<u8> {
        let mut bytes = v.to_be_bytes()[8 - width..].to_vec();
        if !big {
            bytes.reverse();
        }
        bytes
    };
    let mut out = if big { b"MM".to_vec() } else { b"II".to_vec() };
    if recipe.big_tiff {
        out.extend([number(43, 2), number(8, 2), number(0, 2), number(0, 8)].concat());
    } else {
        out.extend([number(42, 2), number(0, 4)].concat());
    }
    let (mut offsets, mut counts) = (Vec::new(), Vec::new());
    for chunk in chunks {
        offsets.push(if chunk.is_empty() { 0 } else { out.len() as u64 });
        counts.push(chunk.len() as u64);
        out.extend(chunk);
    }
    let wide = if recipe.big_tiff { 16 } else { 4 };
    let short = |v: Vec<u16>| (3u16, v.into_iter().map(u64::from).collect::<Vec<u64>>());
    let each = |v: u16| short(vec![v; recipe.samples]);
    let (at, sizes) = if recipe.tile.is_some() { (324, 325) } else { (273, 279) };
    let mut tags = vec![
        (256, (4, vec![recipe.width as u64])),
        (257, (4, vec![recipe.height as u64])),
        (258, each(recipe.kind.bits as u16)),
        (259, short(vec![recipe.codec.code()])),
        (262, short(vec![recipe.photometric])),
        (277, short(vec![recipe.samples as u16])),
        (284, short(vec![if recipe.planar { 2 } else { 1 }])),
        (317, short(vec![recipe.predictor])),
        (339, each(recipe.kind.format)),
        (at, (wide, offsets)),
        (sizes, (4, counts)),
    ];
    if recipe.tile.is_some() {
        tags.extend([(322, short(vec![cw as u16])), (323, short(vec![ch as u16]))]);
    } else {
        tags.push((278, (4, vec![recipe.rows as u64])));
    }
    for (tag, extra) in &recipe.more {
        let value = match extra {
            Extra::Short(v) => short(v.clone()),
            Extra::Text(t) => (2, t.bytes().chain([0]).map(u64::from).collect()),
        };
        tags.push((*tag, value));
    }
    tags.sort_by_key(|(tag, _)| *tag);

    let inline = if recipe.big_tiff { 8 } else { 4 };
    let mut entries = number(tags.len() as u64, if recipe.big_tiff { 8 } else { 2 });
    for (tag, (kind, values)) in tags {
        let width = match kind {
            2 => 1,
            3 => 2,
            4 => 4,
            _ => 8,
        };
        let mut bytes: Vec<u8> = values.iter().flat_map(|v| number(*v, width)).collect();
        entries.extend(
            [number(tag.into(), 2), number(kind.into(), 2), number(values.len() as u64, inline)].concat(),
        );
        if bytes.len() > inline {
            let pointer = number(out.len() as u64, inline);
            out.extend(&bytes);
            bytes = pointer;
        }
        bytes.resize(inline, 0);
        entries.extend(bytes);
    }
    entries.extend(number(0, inline));
    let start = number(out.len() as u64, inline);
    let pointer = if recipe.big_tiff { 8 } else { 4 };
    out[pointer..pointer + inline].copy_from_slice(&start);
    out.extend(entries);
    out
}
