//! One speaker's recordings to that speaker's tokens.

use std::collections::BTreeMap;

use rayon::prelude::*;
use sha2::{Digest, Sha256};

use super::finding::{Finding, FindingKind};
use super::plan::{PlannedVowel, RecordingPlan, SpeakerPlan};
use super::settings::Settings;
use crate::audio::{self, AudioError, Channel, Sound, Waveform};
use crate::files;
use crate::formants::{self, Conditions, SpanAnalysis, Unmeasured};
use crate::segments::{LabelProblem, VowelSpan};
use crate::tokens::{self, Token};

/// Labels are often rounded up past the last sample: this much is cut off without a word. Half of
/// the 10 ms that separate two experts' boundaries at best (durations differ by 6.9 ms,
/// Hillenbrand et al. 1995).
const ROUNDING_S: f64 = 0.005;

/// What came of one speaker.
#[derive(Debug, Clone, PartialEq)]
pub struct MeasuredSpeaker {
    /// Who.
    pub speaker: String,
    /// The tokens, by recording and time, every planned one among them.
    pub tokens: Vec<Token>,
    /// The speaker's values in the speaker columns.
    pub given: Vec<String>,
    /// What was left out or odd.
    pub findings: Vec<Finding>,
    /// SHA-256 of every recording read, by its name inside the survey's folder.
    pub hashes: BTreeMap<String, String>,
}

/// Measures all vowels of one speaker. What cannot be read becomes a finding, and its vowels
/// unmeasured tokens.
pub(super) fn measure_speaker(settings: &Settings, plan: &SpeakerPlan) -> MeasuredSpeaker {
    let mut measured = MeasuredSpeaker {
        speaker: plan.speaker.clone(),
        tokens: Vec::new(),
        given: plan.given.clone(),
        findings: Vec::new(),
        hashes: BTreeMap::new(),
    };
    let mut analysed = Vec::new();
    for recording in &plan.recordings {
        analyse_recording(settings, plan, recording, &mut measured, &mut analysed);
    }
    measured.tokens = tokens::read_speaker(analysed);
    measured
}

/// One channel of a recording, ready for analysis.
struct Listened {
    channel: u16,
    conditions: Conditions,
    waveform: Waveform,
}

type Analysed = (VowelSpan, Result<SpanAnalysis, Unmeasured>);

fn analyse_recording(
    settings: &Settings,
    plan: &SpeakerPlan,
    recording: &RecordingPlan,
    measured: &mut MeasuredSpeaker,
    analysed: &mut Vec<Analysed>,
) {
    let sound = read_sound(settings, recording, measured);
    let listened = sound.map(|sound| listen(&sound, &recording.vowels));
    let placed: Vec<(VowelSpan, Result<&Listened, Unmeasured>)> = recording
        .vowels
        .iter()
        .map(|vowel| place(settings, plan, vowel, listened.as_ref(), measured))
        .collect();
    // Speakers are shared out among the threads; within one the vowels are as well, so that a
    // survey of few speakers, and the last speaker of a large one, keep every thread at work.
    analysed.par_extend(placed.into_par_iter().map(|(span, heard)| {
        let analysis =
            heard.and_then(|heard| formants::analyse(&heard.waveform, &heard.conditions, &span));
        (span, analysis)
    }));
}

type Channels = BTreeMap<Channel, Result<Listened, AudioError>>;

/// The channel a label means.
fn channel_of(vowel: &PlannedVowel) -> Channel {
    vowel
        .row
        .channel
        .map_or(Channel::Loudest, Channel::Numbered)
}

/// Every channel the labels of a recording mean.
fn listen(sound: &Sound, vowels: &[PlannedVowel]) -> Channels {
    let mut channels = Channels::new();
    for vowel in vowels {
        let asked = channel_of(vowel);
        channels.entry(asked).or_insert_with(|| {
            let number = sound.resolve(asked)?;
            let waveform = sound.waveform(Channel::Numbered(number))?;
            Ok(Listened {
                channel: number,
                conditions: Conditions::find(&waveform),
                waveform,
            })
        });
    }
    channels
}

/// The span of a vowel, and the channel it is to be looked for in or why there is none.
fn place<'a>(
    settings: &Settings,
    plan: &SpeakerPlan,
    vowel: &PlannedVowel,
    listened: Option<&'a Channels>,
    measured: &mut MeasuredSpeaker,
) -> (VowelSpan, Result<&'a Listened, Unmeasured>) {
    let mut span = vowel.row.span(
        vowel.token.clone(),
        plan.speaker.clone(),
        vowel.row.channel.unwrap_or(1),
        vowel.vowel.clone(),
    );
    let heard = match listened.and_then(|channels| channels.get(&channel_of(vowel))) {
        None => Err(Unmeasured::NoRecording),
        Some(Err(error)) => {
            measured.findings.push(Finding::new(
                FindingKind::ChannelMissing,
                format!("{} line {}", settings.labels_file, vowel.row.line),
                format!("`{}`: {error}", span.recording),
                error.hint(),
            ));
            Err(Unmeasured::NoRecording)
        }
        Some(Ok(heard)) => {
            span.channel = heard.channel;
            keep_within(settings, vowel, &mut span, &heard.waveform, measured).map(|()| heard)
        }
    };
    (span, heard)
}

fn read_sound(
    settings: &Settings,
    recording: &RecordingPlan,
    measured: &mut MeasuredSpeaker,
) -> Option<Sound> {
    let (Some(path), Some(file_name)) = (&recording.path, &recording.file_name) else {
        // Told by the plan, once for all speakers.
        return None;
    };
    let place = format!("{}/{file_name}", settings.recordings_folder);
    let bytes = match files::read(path) {
        Ok(bytes) => bytes,
        Err(error) => {
            measured.findings.push(Finding::new(
                FindingKind::RecordingUnreadable,
                place,
                format!("could not {}: {}", error.action, error.source),
                error.hint(),
            ));
            return None;
        }
    };
    measured.hashes.insert(place.clone(), hash(&bytes));
    match audio::decode(&bytes) {
        Ok(sound) => {
            if let Some(cut) = sound.cut_short {
                measured.findings.push(Finding::new(
                    FindingKind::RecordingCutShort,
                    place,
                    format!(
                        "found {} samples per channel; expected {}, as its header says",
                        cut.found_frames, cut.expected_frames
                    ),
                    "copy the recording again from where it came, if there is more of it",
                ));
            }
            Some(sound)
        }
        Err(error) => {
            measured.findings.push(Finding::new(
                FindingKind::RecordingUnreadable,
                place,
                &error,
                error.hint(),
            ));
            None
        }
    }
}

/// Cuts a span that reaches past the end by rounding; refuses one that reaches further.
fn keep_within(
    settings: &Settings,
    vowel: &PlannedVowel,
    span: &mut VowelSpan,
    waveform: &Waveform,
    measured: &mut MeasuredSpeaker,
) -> Result<(), Unmeasured> {
    let duration_s = waveform.duration_s();
    if span.end_s <= duration_s {
        return Ok(());
    }
    if span.end_s <= duration_s + ROUNDING_S && span.start_s < duration_s {
        span.end_s = duration_s;
        return Ok(());
    }
    let problem = LabelProblem::PastEnd {
        end_s: span.end_s,
        duration_s,
    };
    measured.findings.push(Finding::new(
        FindingKind::SpanPastEnd,
        format!("{} line {}", settings.labels_file, vowel.row.line),
        format!("`{}`: {problem}", span.recording),
        problem.hint(),
    ));
    Err(Unmeasured::OutsideRecording)
}

/// SHA-256 in hexadecimal.
pub(super) fn hash(bytes: &[u8]) -> String {
    Sha256::digest(bytes)
        .iter()
        .map(|byte| format!("{byte:02x}"))
        .collect()
}
