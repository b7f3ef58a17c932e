//! The page as a whole: everything that must be on it is there, and no text is cut, overlaps or leaves the page.

use super::*;
use crate::fixture;
use gaussgap_conclusions::report::*;
use gaussgap_simulation::figure::Figure;

const SIZES: [PageSize; 4] = [PageSize::Landscape, PageSize::A4, PageSize::Letter, PageSize::Slide];

/// Fails where two texts share room or a text leaves the page.
fn assert_readable(report: &Report, what: &str) {
    for size in SIZES {
        let style = PageStyle { size, ..PageStyle::default() };
        let canvas = drawn(report, &style);
        let (width, height) = size.dimensions();
        let (width, height) = (f64::from(width), f64::from(height));
        for (index, first) in canvas.texts.iter().enumerate() {
            let room = first.room;
            assert!(
                room.left >= 0.0 && room.top >= 0.0 && room.right <= width && room.bottom <= height,
                "{what}, {size:?}: \"{}\" leaves the page: {room:?}",
                first.text
            );
            for second in &canvas.texts[index + 1..] {
                let other = second.room;
                let overlap = room.left.max(other.left) + 0.5 < room.right.min(other.right)
                    && room.top.max(other.top) + 0.5 < room.bottom.min(other.bottom);
                assert!(
                    !overlap,
                    "{what}, {size:?}: \"{}\" and \"{}\" overlap: {room:?} {other:?}",
                    first.text, second.text
                );
            }
        }
    }
}

/// All the text of an SVG, in order, without markup.
fn text_of(svg: &str) -> String {
    let mut text = String::new();
    for element in svg.split("<text ").skip(1) {
        let content = element.split_once('>').unwrap().1.split_once("</text>").unwrap().0;
        text.push_str(
            &content.replace("&lt;", "<").replace("&gt;", ">").replace("&quot;", "\"").replace("&amp;", "&"),
        );
        text.push(' ');
    }
    text
}

#[test]
fn every_required_element_is_in_the_text() {
    let report = fixture::exponential();
    for size in SIZES {
        let text = text_of(&to_svg(&report, &PageStyle { size, ..PageStyle::default() }));
        let digest = scenario_digest(&report);
        let required = [
            "Boarding time per car",
            "I will treat the mean of 30 boarding times",
            "✗ FAILS",
            "Not safe at n = 30",
            "Safe from n = 177",
            "allowed difference ±0.01",
            "Kolmogorov distance 0.02429100 ± 0.00000050",
            "Berry–Esseen bound ≤ 0.169",
            "Fit: actual and normal distribution",
            "widest gap 0.024291",
            "z = −0.06",
            "Gap: actual minus normal",
            "one-term expansion",
            "allowed ±0.01",
            "Growth: distance over n",
            "leading term",
            "planned n = 30",
            "safe from n = 177",
            "Tails",
            "actual/normal",
            "Z > z",
            "Remedies at the planned n",
            "One-term Edgeworth",
            "✓ yes",
            "rule of thumb",
            "n ≥ 30",
            "The law of one summand",
            "0 to ∞",
            "Cautions",
            "The figures assume independent boarding times",
            "gaussgap 0.1.0",
            "route: closed form",
            "(bound)",
            "Shevtsova 2013",
            "gamma law with shape 30",
            digest.as_str(),
        ];
        for element in required {
            assert!(text.contains(element), "{size:?}: \"{element}\" is missing in: {text}");
        }
    }
}

#[test]
fn the_usual_page_is_readable() {
    assert_readable(&fixture::exponential(), "exponential");
}

#[test]
fn a_title_of_200_characters_and_unbreakable_words_are_readable() {
    let mut report = fixture::exponential();
    report.scenario.title =
        Some("Quillmere boarding with a rather long title & <signs> ".repeat(4).chars().take(200).collect());
    report.verdict.because = "because of this and that ".repeat(30);
    assert_readable(&report, "long title");
    report.scenario.title = Some("W".repeat(200));
    report.verdict.because = "x".repeat(600);
    report.cautions = vec!["caution ".repeat(80), "y".repeat(300), "third ".repeat(100)];
    report.method.detail = "detail ".repeat(100);
    report.remedies =
        vec![Remedy { name: "remedy ".repeat(30), actual: None, holds: false, note: "note ".repeat(50) }; 12];
    report.rules_of_thumb = vec![
        RuleOfThumb {
            rule: "rule ".repeat(40),
            source: "s".into(),
            n: None,
            says: "not enough".into(),
            agrees: None
        };
        9
    ];
    assert_readable(&report, "long words");
    let svg = to_svg(&report, &PageStyle::default());
    assert!(svg.contains(&"W".repeat(20)) && svg.contains('…'));
}

#[test]
fn guarantees_of_a_deviation_claim_are_shown() {
    let mut report = fixture::exponential();
    report.claim.kind = "deviation".to_owned();
    let row = |name: &str, value| Guarantee {
        name: name.to_owned(),
        value,
        conditions: "finite variance".to_owned(),
        source: "–".to_owned(),
    };
    report.claim.guarantees = Some(vec![row("Chebyshev", Some(0.25)), row("Hoeffding", None)]);
    report.claim.needed_n = Some([("Chebyshev".to_owned(), Some(12_345))].into());
    assert_readable(&report, "guarantees");
    let text = text_of(&to_svg(&report, &PageStyle::default()));
    assert!(text.contains("Chebyshev 0.25 12\u{202f}345 Hoeffding – –"), "{text}");
}

#[test]
fn extreme_values_are_readable() {
    for extreme in [1e-300, 1e-12, 1e12, 1e300, f64::MAX, -1e300, 5e-324] {
        let mut report = fixture::exponential();
        let figure = Some(Figure::bound(extreme, extreme.abs() * 1e-3));
        report.claim = ClaimFacts {
            kind: "interval".to_owned(),
            nominal: extreme,
            actual: figure,
            difference: Some(extreme),
            allowed: extreme.abs(),
            miss_low: figure,
            miss_high: figure,
            nominal_miss_low: Some(extreme),
            nominal_miss_high: Some(extreme),
            normal_quantile: Some(extreme),
            actual_quantile: figure,
            guarantees: None,
            needed_n: None,
        };
        report.summand.mean = Some(extreme);
        report.summand.sd = Some(extreme);
        report.summand.support = [Some(-extreme.abs()), Some(extreme.abs())];
        report.sum.skewness = Some(extreme);
        for row in &mut report.tails {
            row.at_or_below = figure;
            row.above = figure;
            row.z = extreme;
        }
        report.distance.kolmogorov = figure;
        report.distance.at_z = Some(extreme);
        report.growth.kolmogorov = report.growth.n.iter().map(|&n| Some(extreme.abs() / n as f64)).collect();
        report.verdict.safe_from = Some(1_000_000_000);
        assert_readable(&report, &format!("extreme {extreme:e}"));
    }
}

#[test]
fn missing_figures_are_said_to_be_missing() {
    let mut report = fixture::exponential();
    report.summand.sd = None;
    report.sum.sd = None;
    report.sum.skewness = None;
    report.method.route = None;
    report.distance =
        DistanceFacts { kolmogorov: None, at_z: None, side: None, leading_term: None, berry_esseen: None };
    report.curve = Curve::default();
    report.growth = Growth::default();
    report.verdict.safe_from = None;
    report.verdict.checked = None;
    report.remedies.clear();
    report.rules_of_thumb.clear();
    for row in &mut report.tails {
        row.at_or_below = None;
        row.below = None;
        row.above = None;
    }
    assert_readable(&report, "missing");
    let text = text_of(&to_svg(&report, &PageStyle::default()));
    assert!(
        text.contains("without a finite variance") && !text.contains("NaN") && !text.contains("inf"),
        "{text}"
    );
}

#[test]
fn pictures_have_the_size_asked_for() {
    let report = fixture::exponential();
    for (style, width, height) in [
        (PageStyle::default(), 1600, 1000),
        (PageStyle { size: PageSize::A4, scale: 2.0, dark: true }, 2480, 3508),
        (PageStyle { scale: f32::NAN, ..PageStyle::default() }, 1600, 1000),
    ] {
        let png = to_png(&report, &style);
        assert_eq!(&png[..8], b"\x89PNG\r\n\x1a\n");
        let number = |at: usize| u32::from_be_bytes(png[at..at + 4].try_into().unwrap());
        assert_eq!((number(16), number(20)), (width, height));
    }
}

/// The picture shows what the SVG says: ink where the words are, the marking colour at the widest gap.
#[test]
fn the_picture_has_text_and_lines() {
    let report = fixture::exponential();
    let style = PageStyle::default();
    let png = to_png(&report, &style);
    let pixels = resvg::tiny_skia::Pixmap::decode_png(&png).unwrap();
    let dark = |room: Rect| {
        let mut count = 0;
        for y in room.top as u32..room.bottom as u32 {
            for x in room.left as u32..room.right as u32 {
                let pixel = pixels.pixel(x, y).unwrap();
                count += u32::from(
                    u32::from(pixel.red()) + u32::from(pixel.green()) + u32::from(pixel.blue()) < 480,
                );
            }
        }
        f64::from(count) / (room.width() * room.height()).max(1.0)
    };
    let canvas = drawn(&report, &style);
    for text in canvas.texts.iter().filter(|text| text.text.len() > 3) {
        let share = dark(text.room);
        assert!((0.02..0.7).contains(&share), "\"{}\" covers {share} of its room", text.text);
    }
}
