//! A small picture of a token: a heat map of its spectrum, the waveform under it, and the formant
//! tracks with their error bars drawn on it.

use serde::Serialize;

use super::numbers::plain;

/// What is drawn of one token. Time runs to the right.
#[derive(Debug, Clone, PartialEq)]
pub struct Picture {
    /// Start and end of the picture in seconds of the recording.
    pub shown_s: [f64; 2],
    /// Start and end of the vowel.
    pub vowel_s: [f64; 2],
    /// Frequency at the upper edge, in hertz; the lower edge is 0.
    pub top_hz: f64,
    /// Columns of the heat map.
    pub columns: usize,
    /// Its levels from 0 (faint) to 15 (loud), row by row from the top.
    pub levels: Vec<u8>,
    /// Lowest and highest sample of each column, full scale at ±1 of the loudest shown.
    pub wave: Vec<[f64; 2]>,
    /// The track.
    pub track: Vec<PicturePoint>,
}

/// A point of the track.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct PicturePoint {
    /// When, in seconds of the recording.
    pub time_s: f64,
    /// F1 to F3 in hertz.
    pub formant_hz: [Option<f64>; 3],
    /// Their standard errors in hertz.
    pub sd_hz: [Option<f64>; 3],
}

/// Size of the drawing; the waveform stands in the lowest part.
const WIDTH: f64 = 240.0;
const MAP_HEIGHT: f64 = 130.0;
const WAVE_HEIGHT: f64 = 34.0;

/// A picture ready to be shown.
#[derive(Debug, Clone, Serialize)]
pub(super) struct PictureView {
    width: f64,
    height: f64,
    map_height: f64,
    image: String,
    wave: String,
    edges: [String; 2],
    tracks: Vec<TrackView>,
    top: String,
}

#[derive(Debug, Clone, Serialize)]
struct TrackView {
    line: String,
    bars: Vec<[String; 3]>,
}

impl PictureView {
    pub(super) fn of(picture: &Picture) -> Self {
        let [from, to] = picture.shown_s;
        let x = |s: f64| WIDTH * (s - from) / (to - from);
        let y = |hz: f64| MAP_HEIGHT * (1.0 - (hz / picture.top_hz).clamp(0.0, 1.0));
        let tracks = (0..3)
            .map(|k| {
                let known = picture.track.iter().filter_map(|p| {
                    Some((x(p.time_s), p.formant_hz[k]?, p.sd_hz[k].unwrap_or(0.0)))
                });
                TrackView {
                    line: known
                        .clone()
                        .map(|(x, hz, _)| format!("{x:.1},{:.1}", y(hz)))
                        .collect::<Vec<_>>()
                        .join(" "),
                    bars: known
                        .map(|(x, hz, sd)| {
                            [plain(x, 1), plain(y(hz + sd), 1), plain(y(hz - sd), 1)]
                        })
                        .collect(),
                }
            })
            .collect();
        let middle = MAP_HEIGHT + WAVE_HEIGHT / 2.0;
        let step = WIDTH / picture.wave.len().max(1) as f64;
        let side = |pick: usize| {
            picture.wave.iter().enumerate().map(move |(n, w)| {
                let at = (n as f64 + 0.5) * step;
                format!("{at:.1},{:.1}", middle - w[pick] * WAVE_HEIGHT / 2.0)
            })
        };
        let lower: Vec<String> = side(0).collect();
        let wave: Vec<String> = side(1).chain(lower.into_iter().rev()).collect();
        Self {
            width: WIDTH,
            height: MAP_HEIGHT + WAVE_HEIGHT,
            map_height: MAP_HEIGHT,
            image: format!("data:image/png;base64,{}", base64(&png(picture))),
            wave: wave.join(" "),
            edges: picture.vowel_s.map(|s| plain(x(s), 1)),
            tracks,
            top: plain(picture.top_hz / 1_000.0, 1),
        }
    }
}

/// Colours of the faintest and the loudest level; those between are mixed: paper and deep water.
const FAINT: [f64; 3] = [244.0, 241.0, 232.0];
const LOUD: [f64; 3] = [9.0, 46.0, 58.0];

/// The heat map as a PNG of 16 colours, loud dark.
///
/// *Source*: Portable Network Graphics (Third Edition), W3C Recommendation 2025; the data are in
/// stored blocks (RFC 1950, RFC 1951), a picture of this size gains little from more.
fn png(picture: &Picture) -> Vec<u8> {
    let columns = picture.columns.max(1);
    let rows = picture.levels.len() / columns;
    let mut raw = Vec::with_capacity(rows * (columns / 2 + 2));
    for row in picture.levels.chunks_exact(columns) {
        raw.push(0);
        for pair in row.chunks(2) {
            raw.push(pair[0].min(15) << 4 | pair.get(1).map_or(0, |level| (*level).min(15)));
        }
    }
    let mut data = vec![0x78, 0x01];
    let blocks = raw.chunks(0xffff);
    let last = blocks.len().saturating_sub(1);
    for (n, block) in blocks.enumerate() {
        let length = block.len() as u16;
        data.push(u8::from(n == last));
        data.extend(length.to_le_bytes());
        data.extend((!length).to_le_bytes());
        data.extend(block);
    }
    data.extend(adler32(&raw).to_be_bytes());
    let mut header = Vec::new();
    header.extend((columns as u32).to_be_bytes());
    header.extend((rows as u32).to_be_bytes());
    // Four bits a pixel, by palette, and the only compression, filtering and order there are.
    header.extend([4, 3, 0, 0, 0]);
    let palette: Vec<u8> = (0..16)
        .flat_map(|level| {
            let share = f64::from(level) / 15.0;
            [0, 1, 2].map(|c| (FAINT[c] + share * (LOUD[c] - FAINT[c])).round() as u8)
        })
        .collect();
    let mut out = b"\x89PNG\r\n\x1a\n".to_vec();
    let parts = [
        (b"IHDR", header),
        (b"PLTE", palette),
        (b"IDAT", data),
        (b"IEND", Vec::new()),
    ];
    for (name, content) in parts {
        out.extend((content.len() as u32).to_be_bytes());
        let start = out.len();
        out.extend(name);
        out.extend(content);
        let sum = crc32(&out[start..]);
        out.extend(sum.to_be_bytes());
    }
    out
}

/// Checksum of RFC 1950.
fn adler32(bytes: &[u8]) -> u32 {
    let (a, b) = bytes.iter().fold((1u32, 0u32), |(a, b), byte| {
        let a = (a + u32::from(*byte)) % 65_521;
        (a, (b + a) % 65_521)
    });
    b << 16 | a
}

/// Checksum of the PNG recommendation, annex D.
fn crc32(bytes: &[u8]) -> u32 {
    !bytes.iter().fold(u32::MAX, |crc, byte| {
        (0..8).fold(crc ^ u32::from(*byte), |c, _| {
            if c & 1 == 1 {
                0xedb8_8320 ^ (c >> 1)
            } else {
                c >> 1
            }
        })
    })
}

/// RFC 4648, section 4.
fn base64(bytes: &[u8]) -> String {
    const SIGNS: &[u8; 64] = b"ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/";
    let mut text = String::with_capacity(bytes.len() * 4 / 3 + 4);
    for three in bytes.chunks(3) {
        let at = |n: usize| u32::from(*three.get(n).unwrap_or(&0));
        let bits = at(0) << 16 | at(1) << 8 | at(2);
        for n in 0..4 {
            let sign = SIGNS[(bits >> (18 - 6 * n) & 63) as usize];
            text.push(if n <= three.len() {
                char::from(sign)
            } else {
                '='
            });
        }
    }
    text
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn checksums_and_signs_of_the_standards() {
        // The check value of CRC-32 and RFC 1950's sum for "Wikipedia", both widely published.
        assert_eq!(crc32(b"123456789"), 0xcbf4_3926);
        assert_eq!(adler32(b"Wikipedia"), 0x11e6_0398);
        // RFC 4648, section 10.
        for (bytes, text) in [
            ("f", "Zg=="),
            ("fo", "Zm8="),
            ("foo", "Zm9v"),
            ("foobar", "Zm9vYmFy"),
        ] {
            assert_eq!(base64(bytes.as_bytes()), text);
        }
    }

    #[test]
    fn a_png_has_its_parts_in_order() {
        let picture = Picture {
            shown_s: [0.0, 1.0],
            vowel_s: [0.2, 0.8],
            top_hz: 5_000.0,
            columns: 3,
            levels: vec![0, 15, 7, 1, 2, 3],
            wave: vec![[-1.0, 1.0]; 3],
            track: Vec::new(),
        };
        let bytes = png(&picture);
        assert_eq!(&bytes[12..16], b"IHDR");
        assert_eq!(&bytes[16..24], [0, 0, 0, 3, 0, 0, 0, 2]);
        // Row: filter 0, then levels 0, 15 and 7, padded.
        let data = bytes.windows(4).position(|w| w == b"IDAT").unwrap() + 4 + 7;
        assert_eq!(&bytes[data..data + 3], [0, 0x0f, 0x70]);
    }
}
