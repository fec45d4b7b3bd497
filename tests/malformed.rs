//! Input of any shape ends in a value or an error, never in a panic.

use isophone::audio::{self, Channel};
use isophone::segments::{LabelColumns, parse_delimited};
use isophone::tables::{
    ObservationColumns, ObservationTable, SpeakerTable, TokenTable, TrackTable, guard, unguard,
};
use proptest::prelude::*;

/// A good file: 16-bit, two channels, 22.05 kHz.
fn good_wav() -> Vec<u8> {
    let spec = hound::WavSpec {
        channels: 2,
        sample_rate: 22_050,
        bits_per_sample: 16,
        sample_format: hound::SampleFormat::Int,
    };
    let mut out = std::io::Cursor::new(Vec::new());
    let mut writer = hound::WavWriter::new(&mut out, spec).expect("a header");
    for n in 0..2_000_i32 {
        writer
            .write_sample((n * 37 % 20_000 - 10_000) as i16)
            .expect("a sample");
    }
    writer.finalize().expect("an end");
    out.into_inner()
}

fn decode_whole(bytes: &[u8]) {
    if let Ok(sound) = audio::decode(bytes)
        && let Ok(waveform) = sound.waveform(Channel::Loudest)
    {
        assert!(waveform.samples.iter().all(|sample| sample.is_finite()));
    }
}

const GOOD_LABELS: &str = "recording,start_s,end_s,label,word,speaker,channel\n\
                           a.wav,0.10,0.25,i,heed,s1,1\nb.wav,0.5,0.75,\"u, or so\",,s2,\n";

#[test]
fn a_wav_cut_at_every_byte_is_an_error_or_a_shorter_sound() {
    let bytes = good_wav();
    let whole = audio::decode(&bytes).expect("decodes").channels[0].len();
    for end in 0..bytes.len() {
        if let Ok(sound) = audio::decode(&bytes[..end]) {
            assert!(sound.channels[0].len() < whole, "cut at {end}");
            assert!(sound.cut_short.is_some(), "cut at {end} and not told");
        }
    }
}

#[test]
fn labels_cut_at_every_byte_are_read_as_far_as_they_go() {
    for end in 0..GOOD_LABELS.len() {
        let _ = parse_delimited(&GOOD_LABELS.as_bytes()[..end], &LabelColumns::default());
    }
}

proptest! {
    #[test]
    fn no_bytes_make_the_decoder_panic(bytes in prop::collection::vec(any::<u8>(), 0..600)) {
        decode_whole(&bytes);
        let behind_a_header = [b"RIFF\0\0\0\0WAVEfmt ".as_slice(), &bytes].concat();
        decode_whole(&behind_a_header);
    }

    #[test]
    fn no_change_of_a_good_file_makes_the_decoder_panic(
        changes in prop::collection::vec((0_usize..60, any::<u8>()), 1..8),
    ) {
        let mut bytes = good_wav();
        for (at, byte) in changes {
            bytes[at] = byte;
        }
        decode_whole(&bytes);
    }

    #[test]
    fn no_bytes_make_the_readers_of_text_panic(
        bytes in prop::collection::vec(any::<u8>(), 0..300),
        changes in prop::collection::vec((0_usize..100, any::<u8>()), 0..8),
    ) {
        let mut labels = GOOD_LABELS.as_bytes().to_vec();
        for (at, byte) in changes {
            labels[at] = byte;
        }
        for text in [bytes.as_slice(), &labels] {
            let _ = parse_delimited(text, &LabelColumns::default());
            let _ = SpeakerTable::parse(text, "speaker");
            let _ = TokenTable::parse(text);
            let _ = TrackTable::parse(text);
            let _ = ObservationTable::parse(text, &ObservationColumns::as_named());
        }
    }

    #[test]
    fn every_label_that_is_read_is_usable(
        cells in prop::collection::vec("[0-9.,eE+-]{0,8}", 8..40),
    ) {
        let mut text = String::from("recording;start_s;end_s;label\n");
        for pair in cells.chunks_exact(2) {
            text.push_str(&format!("a.wav;{};{};i\n", pair[0], pair[1]));
        }
        let labels = parse_delimited(text.as_bytes(), &LabelColumns::default()).expect("a header");
        prop_assert_eq!(labels.rows.len() + labels.problems.len(), cells.len() / 2);
        for row in labels.rows {
            prop_assert!(row.start_s >= 0.0 && row.end_s > row.start_s && row.end_s.is_finite());
        }
    }

    #[test]
    fn what_the_guard_does_is_undone(text in "['=+@\\-0-9a-z.\t]{0,6}") {
        let guarded = guard(&text);
        prop_assert_eq!(unguard(&guarded), text.as_str());
    }
}
