//! WAV files: the parts of the file are found here, the samples are read by `hound`.
//!
//! The parts are walked by ourselves because files from the field often have what a strict reader
//! refuses: notes of odd length before the samples, a length of zero or of 4 GB left by a recorder
//! that lost power, an end in the middle of a sample. The samples then go to `hound` behind a
//! header that says what is really there.
//!
//! *Source*: Multimedia Programming Interface and Data Specifications 1.0 (1991), "Waveform Audio
//! File Format"; the extensible form from the `WAVEFORMATEXTENSIBLE` structure's public
//! documentation.

use std::io::{Cursor, Read};

use super::{AudioError, CutShort, HIGHEST_RATE_HZ, LOWEST_RATE_HZ, Sound};

/// Codings as the `fmt ` part numbers them.
const WHOLE_NUMBERS: u16 = 1;
const FLOATS: u16 = 3;
const EXTENSIBLE: u16 = 0xFFFE;

/// More channels than any field recorder has; a header that claims more is damaged.
const MOST_CHANNELS: u16 = 64;

/// What a `fmt ` part says.
#[derive(Debug, Clone, Copy)]
struct Format {
    coding: u16,
    channels: u16,
    rate_hz: u32,
    bytes_per_sample: u16,
}

impl Format {
    fn frame_bytes(self) -> usize {
        usize::from(self.channels) * usize::from(self.bytes_per_sample)
    }
}

/// Decodes the bytes of a WAV file.
///
/// A file that is cut off, or whose recorder never wrote the length, gives what is there and says
/// so in [`Sound::cut_short`].
///
/// # Errors
/// [`AudioError`] where nothing can be decoded.
pub fn decode(bytes: &[u8]) -> Result<Sound, AudioError> {
    let (format, data, announced_bytes) = find_parts(bytes)?;
    let frame_bytes = format.frame_bytes();
    let frames = data.len() / frame_bytes;
    if frames == 0 {
        return Err(AudioError::Empty);
    }
    let announced_frames = announced_bytes / frame_bytes as u64;
    let channels = read_samples(format, &data[..frames * frame_bytes])?;
    Ok(Sound {
        rate_hz: format.rate_hz,
        channels,
        cut_short: (announced_frames > frames as u64).then_some(CutShort {
            found_frames: frames as u64,
            expected_frames: announced_frames,
        }),
    })
}

/// The format, the bytes of the samples that are there, and how many bytes the header announces.
fn find_parts(bytes: &[u8]) -> Result<(Format, &[u8], u64), AudioError> {
    let is_wav = bytes.len() >= 12
        && (bytes.starts_with(b"RIFF") || bytes.starts_with(b"RF64"))
        && &bytes[8..12] == b"WAVE";
    if !is_wav {
        return Err(AudioError::NotWav {
            found: describe_beginning(bytes),
        });
    }
    let mut format = None;
    let mut at = 12;
    while let Some(head) = bytes.get(at..at + 8) {
        let length = u32_at(head, 4);
        let body = &bytes[at + 8..];
        let present = &body[..body.len().min(length as usize)];
        match &head[..4] {
            b"fmt " => format = Some(read_format(present, at + 8)?),
            b"data" => {
                let Some(format) = format else {
                    return Err(AudioError::Damaged {
                        at,
                        found: "the samples come before their description".to_owned(),
                        expected: "a `fmt ` part first",
                    });
                };
                // Recorders that were cut off, and files over 4 GB, leave these for "unknown".
                let unknown = matches!(length, 0 | u32::MAX);
                let data = if unknown { body } else { present };
                let announced = if unknown {
                    data.len() as u64
                } else {
                    u64::from(length)
                };
                return Ok((format, data, announced));
            }
            _ => {}
        }
        // Parts begin at even places; a part of odd length is followed by one byte of padding.
        at = at + 8 + length as usize + (length % 2) as usize;
    }
    Err(AudioError::MissingPart {
        missing: if format.is_some() { "data" } else { "fmt " },
        at: bytes.len(),
    })
}

fn read_format(part: &[u8], at: usize) -> Result<Format, AudioError> {
    if part.len() < 16 {
        return Err(AudioError::Damaged {
            at,
            found: format!("the description of the samples has {} bytes", part.len()),
            expected: "16 or more",
        });
    }
    let (channels, rate_hz) = (u16_at(part, 2), u32_at(part, 4));
    let (frame_bytes, bits) = (u16_at(part, 12), u16_at(part, 14));
    let coding = match u16_at(part, 0) {
        // The real coding is the first two bytes of the identifier at the end.
        EXTENSIBLE if part.len() >= 40 => u16_at(part, 24),
        coding => coding,
    };
    if channels == 0 || channels > MOST_CHANNELS || frame_bytes == 0 || frame_bytes % channels != 0
    {
        return Err(AudioError::Damaged {
            at: at + 2,
            found: format!("{channels} channels in frames of {frame_bytes} bytes"),
            expected: "1 to 64 channels, and as many bytes for each",
        });
    }
    let bytes_per_sample = frame_bytes / channels;
    let readable = matches!(
        (coding, bytes_per_sample),
        (WHOLE_NUMBERS, 1..=4) | (FLOATS, 4)
    );
    if !readable {
        return Err(AudioError::UnknownCoding {
            found: describe_coding(coding, bits),
        });
    }
    if !(LOWEST_RATE_HZ..=HIGHEST_RATE_HZ).contains(&rate_hz) {
        return Err(AudioError::RateOutOfRange { found_hz: rate_hz });
    }
    Ok(Format {
        coding,
        channels,
        rate_hz,
        bytes_per_sample,
    })
}

/// Whole frames of samples to one vector per channel.
fn read_samples(format: Format, data: &[u8]) -> Result<Vec<Vec<f32>>, AudioError> {
    let channel_count = usize::from(format.channels);
    let frames = data.len() / format.frame_bytes();
    let header = plain_header(format, data.len());
    let damaged = |error: hound::Error| AudioError::Damaged {
        at: 0,
        found: format!("the samples cannot be read ({error})"),
        expected: "samples as the header describes them",
    };
    let mut reader = hound::WavReader::new(Cursor::new(header).chain(data)).map_err(damaged)?;
    let mut channels = vec![Vec::with_capacity(frames); channel_count];
    if format.coding == FLOATS {
        for (at, sample) in reader.samples::<f32>().enumerate() {
            let sample = sample.map_err(damaged)?;
            if !sample.is_finite() {
                return Err(AudioError::NotANumber {
                    frame: at / channel_count,
                    channel: at % channel_count + 1,
                });
            }
            channels[at % channel_count].push(sample);
        }
    } else {
        // Samples fill their bytes from the top, so full scale is that of the bytes, however many
        // of the bits the recorder used.
        let full_scale = f64::powi(2.0, 8 * i32::from(format.bytes_per_sample) - 1);
        for (at, sample) in reader.samples::<i32>().enumerate() {
            let sample = f64::from(sample.map_err(damaged)?);
            channels[at % channel_count].push((sample / full_scale) as f32);
        }
    }
    Ok(channels)
}

/// The plainest header for samples of this format.
fn plain_header(format: Format, data_bytes: usize) -> Vec<u8> {
    let data_bytes = u32::try_from(data_bytes).unwrap_or(u32::MAX - 64);
    let frame_bytes = format.channels * format.bytes_per_sample;
    let mut header = Vec::with_capacity(44);
    header.extend(b"RIFF");
    header.extend((36 + data_bytes).to_le_bytes());
    header.extend(b"WAVEfmt ");
    header.extend(16_u32.to_le_bytes());
    header.extend(format.coding.to_le_bytes());
    header.extend(format.channels.to_le_bytes());
    header.extend(format.rate_hz.to_le_bytes());
    header.extend((format.rate_hz * u32::from(frame_bytes)).to_le_bytes());
    header.extend(frame_bytes.to_le_bytes());
    header.extend((8 * format.bytes_per_sample).to_le_bytes());
    header.extend(b"data");
    header.extend(data_bytes.to_le_bytes());
    header
}

fn describe_beginning(bytes: &[u8]) -> String {
    if bytes.is_empty() {
        return "nothing: the file is empty".to_owned();
    }
    let start = &bytes[..bytes.len().min(12)];
    let named = match start {
        [b'f', b'L', b'a', b'C', ..] => " (a FLAC file)",
        [b'O', b'g', b'g', b'S', ..] => " (an Ogg file)",
        [b'I', b'D', b'3', ..] | [0xFF, 0xE0..=0xFF, ..] => " (an MP3 file)",
        [b'F', b'O', b'R', b'M', ..] => " (an AIFF file)",
        [_, _, _, _, b'f', b't', b'y', b'p', ..] => " (an MPEG-4 file)",
        _ => "",
    };
    format!("`{}`{named}", start.escape_ascii())
}

fn describe_coding(coding: u16, bits: u16) -> String {
    match coding {
        WHOLE_NUMBERS => format!("{bits}-bit whole numbers"),
        FLOATS => format!("{bits}-bit floats"),
        2 | 17 => "ADPCM".to_owned(),
        6 => "A-law".to_owned(),
        7 => "mu-law".to_owned(),
        0x55 => "MP3".to_owned(),
        other => format!("coding number {other}"),
    }
}

fn u16_at(bytes: &[u8], at: usize) -> u16 {
    u16::from_le_bytes([bytes[at], bytes[at + 1]])
}

fn u32_at(bytes: &[u8], at: usize) -> u32 {
    u32::from_le_bytes([bytes[at], bytes[at + 1], bytes[at + 2], bytes[at + 3]])
}

#[cfg(test)]
mod tests {
    use super::super::Channel;
    use super::*;

    /// Values every integer format can hold exactly.
    const VALUES: [f64; 6] = [0.0, 0.5, -0.5, 0.25, -1.0, 0.9921875];

    /// A WAV file written by `hound` (an independent writer), its samples from whole numbers.
    fn file(bits: u16, format: hound::SampleFormat, channels: u16) -> Vec<u8> {
        let spec = hound::WavSpec {
            channels,
            sample_rate: 16_000,
            bits_per_sample: bits,
            sample_format: format,
        };
        let mut out = Cursor::new(Vec::new());
        let mut writer = hound::WavWriter::new(&mut out, spec).expect("a header");
        for value in VALUES {
            for _ in 0..channels {
                match format {
                    hound::SampleFormat::Float => writer.write_sample(value as f32),
                    hound::SampleFormat::Int => {
                        writer.write_sample((value * f64::powi(2.0, i32::from(bits) - 1)) as i32)
                    }
                }
                .expect("a sample");
            }
        }
        writer.finalize().expect("an end");
        out.into_inner()
    }

    fn decoded(bytes: &[u8]) -> Vec<f32> {
        let sound = decode(bytes).expect("decodes");
        assert_eq!(sound.cut_short, None);
        sound.waveform(Channel::Loudest).expect("a channel").samples
    }

    #[test]
    fn every_sample_format_gives_the_same_signal() {
        let expected: Vec<f32> = VALUES.iter().map(|&v| v as f32).collect();
        for channels in [1, 2] {
            for bits in [8, 16, 24, 32] {
                let bytes = file(bits, hound::SampleFormat::Int, channels);
                assert_eq!(decoded(&bytes), expected, "{bits} bit, {channels} channels");
            }
            let bytes = file(32, hound::SampleFormat::Float, channels);
            assert_eq!(decoded(&bytes), expected, "float, {channels} channels");
        }
    }

    /// A header by hand: `fmt ` part, then other parts, then samples.
    fn by_hand(fmt: &[u8], before: &[u8], length: u32, data: &[u8]) -> Vec<u8> {
        let mut bytes = b"RIFF\0\0\0\0WAVEfmt ".to_vec();
        bytes.extend((fmt.len() as u32).to_le_bytes());
        bytes.extend(fmt);
        bytes.extend(before);
        bytes.extend(b"data");
        bytes.extend(length.to_le_bytes());
        bytes.extend(data);
        bytes
    }

    /// 16-bit, one channel, 16 kHz.
    const PLAIN: [u8; 16] = [1, 0, 1, 0, 0x80, 0x3E, 0, 0, 0, 0x7D, 0, 0, 2, 0, 16, 0];
    const TWO_SAMPLES: [u8; 4] = [0, 0x40, 0, 0xC0];

    #[test]
    fn notes_of_odd_length_are_stepped_over() {
        let bytes = by_hand(&PLAIN, b"LIST\x03\0\0\0abc\0", 4, &TWO_SAMPLES);
        assert_eq!(decoded(&bytes), [0.5, -0.5]);
    }

    #[test]
    fn a_length_never_written_means_to_the_end() {
        for length in [0, u32::MAX] {
            assert_eq!(
                decoded(&by_hand(&PLAIN, b"", length, &TWO_SAMPLES)),
                [0.5, -0.5]
            );
        }
    }

    #[test]
    fn a_cut_file_gives_what_is_there_and_says_so() {
        let sound = decode(&by_hand(&PLAIN, b"", 4_000, &[0, 0x40, 0])).expect("a sample");
        assert_eq!(sound.channels, [[0.5]]);
        assert_eq!(
            sound.cut_short,
            Some(CutShort {
                found_frames: 1,
                expected_frames: 2_000
            })
        );
    }

    #[test]
    fn an_extensible_header_with_twenty_used_bits_has_the_scale_of_its_bytes() {
        let mut fmt = PLAIN.to_vec();
        fmt[0] = 0xFE;
        fmt[1] = 0xFF;
        fmt[12] = 3;
        fmt[14] = 24;
        fmt.extend([22, 0, 20, 0, 4, 0, 0, 0]);
        fmt.extend([
            1, 0, 0, 0, 0, 0, 0x10, 0, 0x80, 0, 0, 0xAA, 0, 0x38, 0x9B, 0x71,
        ]);
        assert_eq!(decoded(&by_hand(&fmt, b"", 3, &[0, 0, 0x40])), [0.5]);
    }

    #[test]
    fn what_is_no_recording_is_told_from_what_is_damaged() {
        assert!(matches!(
            decode(b"fLaC\0\0\0\x22aaaaaaaa"),
            Err(AudioError::NotWav { found }) if found.contains("FLAC")
        ));
        assert!(matches!(decode(b""), Err(AudioError::NotWav { .. })));
        assert!(matches!(
            decode(b"RIFF\0\0\0\0WAVE"),
            Err(AudioError::MissingPart {
                missing: "fmt ",
                at: 12
            })
        ));
        assert_eq!(
            decode(&by_hand(&PLAIN, b"", 0, &[])),
            Err(AudioError::Empty)
        );
        let mut slow = PLAIN;
        slow[5] = 0;
        assert_eq!(
            decode(&by_hand(&slow, b"", 4, &TWO_SAMPLES)),
            Err(AudioError::RateOutOfRange { found_hz: 128 })
        );
        let mut law = PLAIN;
        law[0] = 7;
        assert!(matches!(
            decode(&by_hand(&law, b"", 4, &TWO_SAMPLES)),
            Err(AudioError::UnknownCoding { found }) if found == "mu-law"
        ));
    }

    #[test]
    fn a_float_that_is_no_number_has_a_place() {
        let mut fmt = PLAIN;
        fmt[0] = 3;
        fmt[12] = 4;
        fmt[14] = 32;
        let data = [0.5_f32.to_le_bytes(), f32::NAN.to_le_bytes()].concat();
        assert_eq!(
            decode(&by_hand(&fmt, b"", 8, &data)),
            Err(AudioError::NotANumber {
                frame: 1,
                channel: 1
            })
        );
    }
}
