//! A speaker against a norm in plain words, to be handed over.

use std::fmt::Write as _;

use crate::compare::{NormCheck, Offset, Spread, VowelCheck, VowelProgress, Way};
use crate::norms::ReferenceTable;
use crate::vowel::Vowel;

use super::numbers::{counted, interval, listed, plain, signed};
use super::order::shown;

/// What was found, as plain text.
pub fn handout(
    check: &NormCheck,
    norm: &ReferenceTable,
    progress: Option<&[VowelProgress]>,
) -> String {
    let mut text = String::new();
    // Writing to a `String` cannot fail.
    let _ = writeln!(
        text,
        "{}, held against {} ({})",
        check.speaker, check.norm, check.group
    );
    let _ = writeln!(text, "    {}; {}", norm.accent, norm.source);
    let _ = writeln!(
        text,
        "    Formants are {} times the norm's for reasons of size; that is taken out.\n",
        plain(check.size, 2)
    );
    if check.systems_differ() {
        let _ = writeln!(
            text,
            "Caution: the norm lacks {} of the speaker's {}. Different vowel systems cannot be compared\n\
             vowel by vowel (Disner 1980); what follows may say more about the systems than about the\n\
             speaker.\n",
            check.unknown.len(),
            counted(check.unknown.len() + check.vowels.len(), "vowel", "vowels")
        );
    }
    vowels(&mut text, check);
    pairs(&mut text, check);
    if let Some(progress) = progress {
        changes(&mut text, progress);
    }
    left_out(&mut text, check);
    reading(&mut text, check);
    text
}

fn symbols(vowels: &[Vowel]) -> String {
    let order = shown(vowels);
    let names: Vec<String> = order
        .into_iter()
        .map(|v| format!("/{}/", vowels[v]))
        .collect();
    names.join(" ")
}

fn vowels(text: &mut String, check: &NormCheck) {
    let (unlike, like): (Vec<&VowelCheck>, Vec<&VowelCheck>) =
        check.vowels.iter().partition(|v| !v.remarks().is_empty());
    let mut unlike = unlike;
    unlike.sort_by(|a, b| b.distance_sd().total_cmp(&a.distance_sd()));
    if !unlike.is_empty() {
        text.push_str("Unlike the norm, the furthest first\n");
        for v in unlike {
            let _ = writeln!(text, "  /{}/  {}", v.vowel, words(v));
        }
        text.push('\n');
    }
    if !like.is_empty() {
        let like: Vec<Vowel> = like.into_iter().map(|v| v.vowel.clone()).collect();
        let _ = writeln!(text, "Nothing to remark in {}\n", symbols(&like));
    }
}

fn words(v: &VowelCheck) -> String {
    let remarks: Vec<String> = v
        .remarks()
        .iter()
        .map(|r| {
            if r.strong {
                format!("much {}", r.word)
            } else {
                r.word.to_owned()
            }
        })
        .collect();
    let offset = |name: &str, o: &Offset| {
        let range = o
            .interval
            .map_or_else(|| "one token".to_owned(), |i| interval(i, 1));
        format!("{name} {} sd ({range})", signed(o.sd, 1))
    };
    let mut text = format!(
        "{}; {}, {}",
        listed(&remarks),
        offset("F1", &v.offsets[0]),
        offset("F2", &v.offsets[1])
    );
    if let Some((ratio, _)) = v.duration {
        let _ = write!(text, ", {} times as long", plain(ratio, 2));
    }
    let taken: Vec<String> = v
        .taken_for
        .iter()
        .filter(|(vowel, _)| *vowel != v.vowel)
        .map(|(vowel, n)| format!("{n} of {} tokens to /{vowel}/", v.tokens))
        .collect();
    if !taken.is_empty() {
        let _ = write!(text, ";\n       nearest in the norm: {}", listed(&taken));
    }
    text
}

fn pairs(text: &mut String, check: &NormCheck) {
    if !check.not_apart.is_empty() {
        text.push_str("Pairs the norm keeps apart and the speaker does not\n");
        for p in &check.not_apart {
            let [a, b] = &p.vowels;
            let _ = writeln!(
                text,
                "  /{a}/ and /{b}/  {} (Pillai trace {}; one vowel would stay under {} in 95 of 100 \
                 such samples)",
                p.verdict.text(),
                plain(p.overlap.pillai, 2),
                plain(p.overlap.pillai_if_merged_95, 2)
            );
        }
        text.push('\n');
    }
    if !check.too_few.is_empty() {
        let _ = writeln!(
            text,
            "Too few tokens to tell whether {} kept apart; five of each vowel are the least, ten \
             are usual.\n",
            counted(check.too_few.len(), "other pair is", "other pairs are")
        );
    }
}

fn changes(text: &mut String, progress: &[VowelProgress]) {
    text.push_str("Since the earlier time\n");
    for way in [Way::Nearer, Way::Further] {
        for v in progress.iter().filter(|v| v.way() == way) {
            let _ = writeln!(
                text,
                "  /{}/  {}: {} sd then, {} sd now",
                v.vowel,
                way.text(),
                plain(v.distance_sd[0], 1),
                plain(v.distance_sd[1], 1)
            );
        }
    }
    let same: Vec<Vowel> = progress
        .iter()
        .filter(|v| v.way() == Way::NoEvidence)
        .map(|v| v.vowel.clone())
        .collect();
    if !same.is_empty() {
        let _ = writeln!(text, "  {} in {}", Way::NoEvidence.text(), symbols(&same));
    }
    text.push('\n');
}

fn left_out(text: &mut String, check: &NormCheck) {
    if !check.missing.is_empty() {
        let _ = writeln!(text, "The speaker said no {}.", symbols(&check.missing));
    }
    if !check.unknown.is_empty() {
        let unknown: Vec<Vowel> = check.unknown.iter().map(|(v, _)| v.clone()).collect();
        let _ = writeln!(text, "The norm has no {}.", symbols(&unknown));
    }
    if !check.missing.is_empty() || !check.unknown.is_empty() {
        text.push('\n');
    }
}

fn reading(text: &mut String, check: &NormCheck) {
    text.push_str(
        "How to read this: sd is the spread of the norm's own speakers; beyond 1 sd, and surely so over\n\
         the speaker's tokens, a vowel is remarked upon, beyond 2 sd it is called much so. In brackets the\n\
         95 % interval over the tokens. A norm is what some speakers did, not what anybody has to do.\n",
    );
    if check.spread == Spread::Pooled {
        text.push_str(
            "The norm was published without a spread; the mean relative spread of the men and women of\n\
             Hillenbrand et al. 1995 stands in for it, sizes within the groups included.\n",
        );
    }
    text.push_str(
        "Judgements about a person's health, origin, identity or fitness for work are not for this\n\
         program to make; they belong to licensed practice and local rules.\n",
    );
}
