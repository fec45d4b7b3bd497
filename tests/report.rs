//! The page: nothing in it runs, nothing is loaded, every chart has its words and its table.

use isophone::compare::{Resampling, gaussian};
use isophone::report::{Frame, Nature, Picture, Subject, render};
use isophone::tables::{
    ColumnGroups, IdentifiedCells, ReadingCells, TokenRow, TokenTable, TrackTable, pairs_table,
};
use isophone::vowel::Vowel;

/// Names that would run, load or break something if one place forgot to escape them.
const SCRIPT: &str = "<script>alert('x')</script>";
const IMAGE: &str = "\"><img src=x onerror=alert(1)>";
const ENTITY: &str = "a & b < c";
const FORMULA: &str = "=HYPERLINK(\"x\")";

fn table() -> TokenTable {
    let mut random = Resampling::default().stream(4);
    let mut rows = Vec::new();
    let speakers = [
        (SCRIPT, IMAGE),
        (IMAGE, IMAGE),
        (ENTITY, IMAGE),
        (FORMULA, SCRIPT),
        ("Ann", SCRIPT),
        ("Ben", SCRIPT),
    ];
    for (speaker, group) in speakers {
        for (vowel, f1, f2) in [
            ("i", 300.0, 2_300.0),
            ("<b>", 480.0, 1_500.0),
            ("ɑ", 750.0, 1_250.0),
        ] {
            for n in 0..5 {
                let mut near = |hz: f64| Some(hz * (0.05 * gaussian(&mut random)).exp());
                let doubts = if n == 0 {
                    vec![SCRIPT.to_owned()]
                } else {
                    Vec::new()
                };
                let reading = ReadingCells {
                    formant_hz: [near(f1), near(f2), near(2_700.0), None],
                    sd_hz: [Some(12.0), Some(25.0), Some(40.0)],
                    at_s: Some(0.2),
                    doubts,
                    ..ReadingCells::default()
                };
                rows.push(TokenRow {
                    token: format!("{speaker}/{vowel}/{n}"),
                    recording: IMAGE.to_owned(),
                    channel: 1,
                    speaker: speaker.to_owned(),
                    given: vec![group.to_owned()],
                    word: Some(ENTITY.to_owned()),
                    label: SCRIPT.to_owned(),
                    vowel: Some(Vowel::from_ipa(vowel)),
                    start_s: 0.1,
                    end_s: 0.3,
                    duration_s: 0.2,
                    reading: if n == 4 {
                        Err(IMAGE.to_owned())
                    } else {
                        Ok(reading)
                    },
                    normalized: None,
                    identified: Some(IdentifiedCells {
                        identified: Some(Vowel::from_ipa(if n == 1 { "<b>" } else { vowel })),
                        probability: Some(0.8),
                        model: IMAGE.to_owned(),
                        ..IdentifiedCells::default()
                    }),
                });
            }
        }
    }
    TokenTable {
        speaker_columns: vec![IMAGE.to_owned()],
        groups: ColumnGroups {
            normalized: false,
            identified: true,
        },
        rows,
    }
}

fn subject() -> Subject {
    let resampling = Resampling {
        replicates: 200,
        ..Resampling::default()
    };
    let mut subject = Subject::gather(table(), &TrackTable::default(), Some(IMAGE), resampling);
    subject.pictures.insert(
        format!("{SCRIPT}/i/0"),
        Picture {
            shown_s: [0.0, 0.4],
            vowel_s: [0.1, 0.3],
            top_hz: 5_000.0,
            columns: 4,
            levels: vec![3; 8],
            wave: vec![[-0.5, 0.5]; 4],
            track: Vec::new(),
        },
    );
    subject
}

fn page() -> String {
    let frame = Frame {
        title: SCRIPT.to_owned(),
        nature: Nature::Invented,
        provenance: vec![(IMAGE.to_owned(), SCRIPT.to_owned())],
    };
    render(&subject(), &frame).expect("a page")
}

/// A start tag: its name, and its attributes with their values.
struct Tag {
    name: String,
    attributes: Vec<(String, String)>,
}

impl Tag {
    fn value(&self, name: &str) -> Option<&str> {
        self.attributes
            .iter()
            .find(|(n, _)| n == name)
            .map(|(_, value)| value.as_str())
    }
}

/// Every start tag of the page, read as a browser would: attributes are what stands outside quotes.
fn tags(page: &str) -> Vec<Tag> {
    let mut found = Vec::new();
    let mut rest = page;
    while let Some(at) = rest.find('<') {
        rest = &rest[at + 1..];
        if !rest.starts_with(|c: char| c.is_ascii_alphabetic()) {
            continue;
        }
        let mut quoted = false;
        let ends = |c: char| {
            quoted ^= c == '"';
            c == '>' && !quoted
        };
        let end = rest.find(ends).expect("a tag ends");
        let inner = &rest[..end];
        let name: String = inner
            .chars()
            .take_while(char::is_ascii_alphanumeric)
            .collect();
        let mut attributes = Vec::new();
        // Between quotes stand, in turn, ` name=` and a value.
        let mut parts = inner[name.len()..].split('"');
        while let (Some(before), Some(value)) = (parts.next(), parts.next()) {
            let mut words = before.split_whitespace();
            let last = words.next_back().unwrap_or_default();
            attributes.extend(words.map(|w| (w.to_owned(), String::new())));
            attributes.push((last.trim_end_matches('=').to_owned(), value.to_owned()));
        }
        found.push(Tag { name, attributes });
        rest = &rest[end..];
    }
    found
}

#[test]
fn names_and_labels_are_escaped_everywhere() {
    let page = page();
    assert!(page.contains("&lt;script&gt;"));
    for tag in tags(&page) {
        assert!(
            !matches!(tag.name.as_str(), "script" | "img"),
            "<{}>",
            tag.name
        );
        for (name, value) in &tag.attributes {
            assert!(!name.starts_with("on"), "<{} {name}={value}>", tag.name);
        }
    }
    // A vowel called `<b>` is text: every bold word of the page is the page's own and closed.
    let opened = page.matches("<b>").count() + page.matches("<b ").count();
    assert_eq!(opened, page.matches("</b>").count());
}

#[test]
fn nothing_is_loaded_from_anywhere() {
    for tag in tags(&page()) {
        for name in [
            "src",
            "href",
            "xlink:href",
            "srcset",
            "action",
            "data",
            "poster",
            "style",
        ] {
            if let Some(value) = tag.value(name) {
                let inside = value.starts_with('#') || value.starts_with("data:");
                assert!(
                    inside || value == "text-anchor:start",
                    "<{} {name}={value}>",
                    tag.name
                );
            }
        }
        assert!(!matches!(
            tag.name.as_str(),
            "iframe" | "object" | "embed" | "base" | "form"
        ));
    }
    let style = include_str!("../src/report/page.css");
    assert!(!style.contains("url(") && !style.contains("@import"));
}

#[test]
fn every_chart_has_its_words_and_its_section_a_table() {
    let page = page();
    let mut count = 0;
    for tag in tags(&page) {
        if tag.name == "svg" && tag.value("aria-hidden").is_none() {
            count += 1;
            assert_eq!(tag.value("role"), Some("img"));
            assert!(
                tag.value("aria-label")
                    .is_some_and(|label| label.len() > 20)
            );
        }
    }
    // Means, two groups, one contrast, pairs, a picture, six speakers.
    assert!(count >= 11, "{count} charts");
    for section in page.split("<section ").skip(1) {
        let section = section.split("</section>").next().unwrap_or_default();
        if section.contains("role=\"img\"") {
            assert!(section.contains("<table"), "{}", &section[..60]);
        }
    }
}

#[test]
fn the_page_says_that_it_is_invented_and_who_must_not_be_judged_by_it() {
    let page = page();
    assert!(page.contains("Everything here is invented"));
    for word in ["Clinical", "forensic", "asylum", "hiring", "personal data"] {
        assert!(page.contains(word), "{word}");
    }
    let frame = Frame {
        title: "x".to_owned(),
        nature: Nature::Recorded,
        provenance: Vec::new(),
    };
    let recorded = render(&subject(), &frame).expect("a page");
    assert!(!recorded.contains("Everything here is invented"));
}

#[test]
fn the_same_tables_give_the_same_page_whatever_the_number_of_threads() {
    let one = rayon::ThreadPoolBuilder::new()
        .num_threads(1)
        .build()
        .expect("a pool");
    let three = rayon::ThreadPoolBuilder::new()
        .num_threads(3)
        .build()
        .expect("a pool");
    assert!(one.install(page) == three.install(page));
}

#[test]
fn no_cell_of_a_comparison_runs_in_a_spreadsheet() {
    let bytes = pairs_table(&subject().findings);
    let text = String::from_utf8(bytes).expect("text");
    assert!(text.contains("'=HYPERLINK"));
    let mut reader = csv::Reader::from_reader(text.as_bytes());
    for record in reader.records() {
        for cell in record.expect("a row").iter() {
            let number = cell.parse::<f64>().is_ok();
            assert!(number || !cell.starts_with(['=', '+', '-', '@']), "{cell}");
        }
    }
}

#[test]
fn an_ungrouped_survey_of_one_speaker_has_a_page_too() {
    let mut table = table();
    table.rows.retain(|r| r.speaker == "Ann");
    let subject = Subject::gather(table, &TrackTable::default(), None, Resampling::default());
    let frame = Frame {
        title: "one".to_owned(),
        nature: Nature::Recorded,
        provenance: Vec::new(),
    };
    let page = render(&subject, &frame).expect("a page");
    assert!(page.contains("not grouped"));
    let nothing = TokenTable {
        speaker_columns: Vec::new(),
        groups: ColumnGroups::default(),
        rows: Vec::new(),
    };
    let subject = Subject::gather(nothing, &TrackTable::default(), None, Resampling::default());
    assert!(render(&subject, &frame).is_ok());
}
