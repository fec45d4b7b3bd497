//! What was found, how sure it is, what needs a person: in sentences.

use crate::compare::{Findings, GroupPair, PlaceVerdict, Verdict};

use super::contrasts::{told, words};
use super::numbers::{counted, listed, p_value, percent, plain};
use super::pairs::{close, name};

/// Most sentences on one kind of finding; the rest is in the tables.
const MOST: usize = 6;

/// What was found, most telling first.
pub fn found(findings: &Findings) -> Vec<String> {
    if findings.panel.vowels.is_empty() {
        return vec![
            "No token that could be measured carries the label of a vowel, so that nothing is \
             compared; the table of tokens has what was measured."
                .to_owned(),
        ];
    }
    let mut said = differences(findings);
    said.extend(mergers(findings));
    if said.is_empty() {
        said.push(nothing(findings));
    }
    said
}

fn differences(findings: &Findings) -> Vec<String> {
    let mut strong: Vec<(f64, String)> = Vec::new();
    let mut few = Vec::new();
    let mut alike = Vec::new();
    for contrast in &findings.contrasts {
        let [first, second] = &contrast.names;
        let vowels = contrast.vowels.len();
        let differing = told(findings, contrast);
        if contrast
            .vowels
            .iter()
            .all(|v| v.verdict() == PlaceVerdict::TooFew)
        {
            few.push(format!(
                "{} and {} speakers are too few to say anything about a difference between {second} \
                 and {first}: no arrangement of so few could be called unusual.",
                contrast.speakers[1], contrast.speakers[0]
            ));
        } else if differing.is_empty() {
            alike.push(second.clone());
        }
        for (vowel, v) in differing {
            let p = v.place_p_holm.map_or_else(String::new, |p| {
                format!(
                    "; p {} after correction for {}",
                    equal(p),
                    counted(vowels, "vowel", "vowels")
                )
            });
            let sentence = format!("/{vowel}/ in {second} against {first} is {}{p}.", words(v));
            strong.push((v.distance_hz.unwrap_or(0.0), sentence));
        }
    }
    strong.sort_by(|a, b| b.0.total_cmp(&a.0));
    let more = strong.len().saturating_sub(MOST);
    let mut said: Vec<String> = strong.into_iter().take(MOST).map(|(_, s)| s).collect();
    if more > 0 {
        said.push(format!(
            "{} smaller; the tables below have them.",
            counted(more, "more difference is", "more differences are")
        ));
    }
    match alike.len() {
        0 => {}
        1 if findings.contrasts.len() == 1 => {
            let [first, second] = &findings.contrasts[0].names;
            said.push(format!(
                "No vowel of {second} can be told from that of {first}: what differences there are, \
                 chance arrangements of the speakers give too."
            ));
        }
        _ => said.push(format!(
            "No vowel of {} can be told from that of the others: what differences there are, chance \
             arrangements of the speakers give too.",
            listed(&alike)
        )),
    }
    said.extend(few);
    said
}

fn equal(p: f64) -> String {
    let text = p_value(p);
    if text.starts_with('<') {
        text
    } else {
        format!("= {text}")
    }
}

fn mergers(findings: &Findings) -> Vec<String> {
    let mut said = Vec::new();
    for pair in close(findings) {
        let one: Vec<&&GroupPair> = pair
            .iter()
            .filter(|p| p.verdict == Verdict::NoEvidence)
            .collect();
        let two: Vec<&&GroupPair> = pair
            .iter()
            .filter(|p| matches!(p.verdict, Verdict::Apart | Verdict::Overlapping))
            .collect();
        if one.is_empty() {
            continue;
        }
        let names = name(findings, pair[0].vowels);
        let place = |p: &GroupPair| {
            p.group.map_or_else(
                || "all speakers".to_owned(),
                |g| findings.panel.groups[g].clone(),
            )
        };
        let figures: Vec<String> = one
            .iter()
            .map(|p| {
                format!(
                    "{} (mean Pillai trace {} over {}; one and the same vowel gives {}, and stays \
                     under {} in 95 of 100 surveys)",
                    place(p),
                    plain(p.pillai, 2),
                    counted(p.speakers_told(), "speaker", "speakers"),
                    plain(p.pillai_if_merged, 2),
                    plain(p.pillai_if_merged_95, 2)
                )
            })
            .collect();
        let kept: Vec<String> = two
            .iter()
            .map(|p| {
                let how = if p.verdict == Verdict::Apart {
                    "apart"
                } else {
                    "different but overlapping"
                };
                format!("{how} in {} ({})", place(p), plain(p.pillai, 2))
            })
            .collect();
        let kept = if kept.is_empty() {
            String::new()
        } else {
            format!("; {}", listed(&kept))
        };
        said.push(format!(
            "{names}: no evidence of two vowels in {}{kept}.",
            listed(&figures)
        ));
    }
    said.truncate(MOST);
    said
}

fn nothing(findings: &Findings) -> String {
    match findings.panel.groups.len() {
        0 | 1 => format!(
            "{} of {} measured and placed; the speakers are not grouped, so that nothing is \
             compared.",
            counted(findings.panel.vowels.len(), "vowel", "vowels"),
            counted(findings.panel.speakers.len(), "speaker", "speakers"),
        ),
        _ => "No differences and no mergers were found.".to_owned(),
    }
}

/// How sure it is.
pub(super) fn sure(findings: &Findings) -> Vec<String> {
    let tally = &findings.tally;
    let mut said = vec![format!(
        "{} of {} were measured ({}).",
        tally.measured,
        counted(tally.tokens, "token", "tokens"),
        percent(tally.measured, tally.tokens)
    )];
    if let [Some(f1), Some(f2), Some(f3)] = tally.median_sd_hz {
        said.push(format!(
            "The typical token is known to ± {} Hz in F1, {} Hz in F2, {} Hz in F3 (one standard \
             error).",
            plain(f1, 0),
            plain(f2, 0),
            plain(f3, 0)
        ));
    }
    if tally.identified > 0 {
        said.push(format!(
            "The classifier, which does not see the labels, agrees with them in {} of {} ({}).",
            tally.agreeing,
            counted(tally.identified, "token", "tokens"),
            percent(tally.agreeing, tally.identified)
        ));
    }
    if !findings.panel.left_out.is_empty() {
        said.push(format!(
            "{} could not be brought to a common size and are in no comparison.",
            counted(findings.panel.left_out.len(), "speaker", "speakers")
        ));
    }
    said
}

/// What needs a person.
pub(super) fn person(findings: &Findings) -> Vec<String> {
    let tally = &findings.tally;
    let unmeasured = tally.tokens - tally.measured;
    let mut said = Vec::new();
    if tally.doubtful > 0 {
        said.push(format!(
            "{} ({}) should be looked at before it counts: see the list of doubts.",
            counted(tally.doubtful, "token", "tokens"),
            percent(tally.doubtful, tally.measured)
        ));
    }
    if unmeasured > 0 {
        let reasons: Vec<String> = tally
            .reasons
            .iter()
            .map(|(r, n)| format!("{n} {r}"))
            .collect();
        said.push(format!(
            "{} could not be measured: {}.",
            counted(unmeasured, "token", "tokens"),
            listed(&reasons)
        ));
    }
    if said.is_empty() {
        said.push("Nothing stands out: no token is doubted.".to_owned());
    }
    said
}
