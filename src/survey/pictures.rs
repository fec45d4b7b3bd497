//! Pictures of doubtful tokens for the page, from the recordings.

use std::collections::BTreeMap;

use super::Survey;
use crate::audio::{self, ANALYSIS_RATE_HZ, Channel, Waveform};
use crate::files;
use crate::report::{Picture, PicturePoint};
use crate::signal::spectrum::PowerSpectrum;
use crate::signal::window::hann;
use crate::tables::{TokenRow, TrackRow};

/// Most pictures on a page: a person who looks at more than this looks at the program's review.
pub(super) const MOST: usize = 48;

/// Sound shown before and after the vowel, in seconds.
const AROUND_S: f64 = 0.04;
const COLUMNS: usize = 120;
const ROWS: usize = 65;
/// Upper edge in hertz: above the F3 of small children (about 3.7 kHz in Hillenbrand et al. 1995).
const TOP_HZ: f64 = 5_000.0;
/// A frame of 6 ms shows formants rather than harmonics up to voices of about 250 Hz.
const FRAME_S: f64 = 0.006;
/// Levels further than this under the loudest are white.
const RANGE_DB: f64 = 45.0;

/// A token and its track.
type DrawnToken = (TokenRow, Vec<TrackRow>);

/// The tokens that will be drawn: those with the most doubts, the earlier ones first.
#[derive(Debug, Default)]
pub(super) struct Drawn {
    pub(super) tokens: Vec<DrawnToken>,
}

impl Drawn {
    /// Takes a token into account.
    pub(super) fn consider(&mut self, row: &TokenRow, track: &[TrackRow]) {
        let doubts = |row: &TokenRow| row.reading.as_ref().map_or(0, |r| r.doubts.len());
        if doubts(row) == 0 {
            return;
        }
        if self.tokens.len() == MOST {
            let least = (0..MOST)
                .rev()
                .min_by_key(|n| doubts(&self.tokens[*n].0))
                .unwrap_or(0);
            if doubts(&self.tokens[least].0) >= doubts(row) {
                return;
            }
            self.tokens.remove(least);
        }
        self.tokens.push((row.clone(), track.to_vec()));
    }
}

/// Draws the tokens whose recordings can be read; the others have no picture.
pub(super) fn draw(survey: &Survey, drawn: &Drawn) -> BTreeMap<String, Picture> {
    let paths: BTreeMap<&str, _> = survey
        .plan
        .speakers
        .iter()
        .flat_map(|s| &s.recordings)
        .filter_map(|r| Some((r.name.as_str(), r.path.as_ref()?)))
        .collect();
    let mut by_recording: BTreeMap<(&str, u16), Vec<&DrawnToken>> = BTreeMap::new();
    for token in &drawn.tokens {
        by_recording
            .entry((&token.0.recording, token.0.channel))
            .or_default()
            .push(token);
    }
    let mut pictures = BTreeMap::new();
    for ((recording, channel), tokens) in by_recording {
        let Some(waveform) = paths.get(recording).and_then(|path| {
            let sound = audio::decode(&files::read(path).ok()?).ok()?;
            sound.waveform(Channel::Numbered(channel)).ok()
        }) else {
            continue;
        };
        for (row, track) in tokens {
            pictures.insert(row.token.clone(), picture(&waveform, row, track));
        }
    }
    pictures
}

fn picture(waveform: &Waveform, row: &TokenRow, track: &[TrackRow]) -> Picture {
    let from_s = (row.start_s - AROUND_S).max(0.0);
    let to_s = (row.end_s + AROUND_S)
        .min(waveform.duration_s())
        .max(from_s + 1e-3);
    let window = hann((FRAME_S * ANALYSIS_RATE_HZ) as usize);
    let mut spectrum = PowerSpectrum::new(&window, FFT);
    let at = |column: f64| from_s + (to_s - from_s) * column / COLUMNS as f64;
    let mut level_db = vec![f64::NEG_INFINITY; ROWS * COLUMNS];
    let mut wave = Vec::with_capacity(COLUMNS);
    for column in 0..COLUMNS {
        let centre = (at(column as f64 + 0.5) * ANALYSIS_RATE_HZ) as usize;
        let power = spectrum.at(&waveform.samples, centre);
        for line in 0..ROWS {
            let hz = TOP_HZ * (ROWS as f64 - line as f64 - 0.5) / ROWS as f64;
            level_db[line * COLUMNS + column] = lifted_db(power, hz);
        }
        let sample = |s: f64| ((s * ANALYSIS_RATE_HZ) as usize).min(waveform.samples.len());
        let part = &waveform.samples[sample(at(column as f64))..sample(at(column as f64 + 1.0))];
        let low = part.iter().copied().fold(0.0f32, f32::min);
        let high = part.iter().copied().fold(0.0f32, f32::max);
        wave.push([f64::from(low), f64::from(high)]);
    }
    let loudest = level_db.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    let levels = level_db
        .iter()
        .map(|db| (16.0 * (1.0 - (loudest - db) / RANGE_DB)).clamp(0.0, 15.0) as u8)
        .collect();
    let top = wave.iter().flatten().fold(1e-9f64, |m, v| m.max(v.abs()));
    Picture {
        shown_s: [from_s, to_s],
        vowel_s: [row.start_s, row.end_s],
        top_hz: TOP_HZ,
        columns: COLUMNS,
        levels,
        wave: wave.into_iter().map(|w| w.map(|v| v / top)).collect(),
        track: track
            .iter()
            .map(|t| PicturePoint {
                time_s: t.time_s,
                formant_hz: t.formant_hz,
                sd_hz: t.sd_hz,
            })
            .collect(),
    }
}

/// Length of the transform: bins of 62.5 Hz, near the height of a line.
const FFT: usize = 256;

/// Level at a frequency, lifted by 6 dB an octave above 500 Hz, about what the voice falls by
/// (common practice), so that the upper formants show.
fn lifted_db(power: &[f32], hz: f64) -> f64 {
    let bin = hz * FFT as f64 / ANALYSIS_RATE_HZ;
    let below = bin as usize;
    let share = bin - below as f64;
    let between = (1.0 - share) * f64::from(power[below]) + share * f64::from(power[below + 1]);
    10.0 * (between + 1e-12).log10() + 20.0 * (hz.max(500.0) / 500.0).log10()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::tables::ReadingCells;

    fn row(doubts: usize) -> TokenRow {
        TokenRow {
            token: format!("t{doubts}"),
            recording: "r.wav".to_owned(),
            channel: 1,
            speaker: "s".to_owned(),
            given: Vec::new(),
            word: None,
            label: "i".to_owned(),
            vowel: None,
            start_s: 0.1,
            end_s: 0.3,
            duration_s: 0.2,
            reading: Ok(ReadingCells {
                doubts: vec!["x".to_owned(); doubts],
                ..ReadingCells::default()
            }),
            normalized: None,
            identified: None,
        }
    }

    #[test]
    fn a_tone_is_dark_at_its_frequency() {
        let tone = |n: u32| {
            (std::f64::consts::TAU * 2_000.0 * f64::from(n) / ANALYSIS_RATE_HZ).sin() as f32
        };
        let waveform = Waveform {
            samples: (0..6_400).map(tone).collect(),
            band_edge_hz: 8_000.0,
        };
        let drawn = picture(&waveform, &row(1), &[]);
        let middle: Vec<u8> = (0..ROWS)
            .map(|r| drawn.levels[r * COLUMNS + COLUMNS / 2])
            .collect();
        let loud = (0..ROWS).max_by_key(|r| middle[*r]).unwrap();
        // Lines are 77 Hz high and a frame of 6 ms blurs by some 300 Hz.
        let hz = TOP_HZ * (ROWS - loud) as f64 / ROWS as f64;
        assert!((hz - 2_000.0).abs() < 200.0, "{hz}");
        assert!(middle[ROWS - 1] < 8);
    }

    #[test]
    fn the_most_doubted_are_drawn() {
        let mut drawn = Drawn::default();
        drawn.consider(&row(0), &[]);
        for _ in 0..MOST {
            drawn.consider(&row(1), &[]);
        }
        drawn.consider(&row(3), &[]);
        drawn.consider(&row(1), &[]);
        assert_eq!(drawn.tokens.len(), MOST);
        assert_eq!(drawn.tokens[MOST - 1].0.token, "t3");
    }
}
