//! Contrast and colour distance, measured.
//!
//! Sources of the formulas: relative luminance and contrast, WCAG 2.1; sRGB to
//! CIE L*a*b* under D65, IEC 61966-2-1; colour vision deficiencies at full
//! severity, Machado, Oliveira and Fernandes 2009 (table of matrices, from
//! memory); colour distance, CIEDE2000 as in Sharma, Wu and Dalal 2005.

use super::*;

const THEMES: [Theme; 3] = [Theme::Light, Theme::Dark, Theme::Print];

/// Usual vision, then without the long-, middle- and short-wave cones.
const SEEN: [(&str, [[f64; 3]; 3]); 4] = [
    ("usual", [[1.0, 0.0, 0.0], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]]),
    ("protanopia", [[0.152286, 1.052583, -0.204868], [0.114503, 0.786281, 0.099216], [-0.003882, -0.048116, 1.051998]]),
    (
        "deuteranopia",
        [[0.367322, 0.860646, -0.227968], [0.280085, 0.672501, 0.047413], [-0.011820, 0.042940, 0.968881]],
    ),
    ("tritanopia", [[1.255528, -0.076749, -0.178779], [-0.078411, 0.930809, 0.147602], [0.004733, 0.691367, 0.303900]]),
];

const TO_XYZ: [[f64; 3]; 3] =
    [[0.4124564, 0.3575761, 0.1804375], [0.2126729, 0.7151522, 0.0721750], [0.0193339, 0.1191920, 0.9503041]];

fn linear(colour: Rgb) -> [f64; 3] {
    colour.0.map(|c| {
        let c = f64::from(c) / 255.0;
        if c <= 0.04045 { c / 12.92 } else { libm::pow((c + 0.055) / 1.055, 2.4) }
    })
}

fn times(matrix: &[[f64; 3]; 3], v: [f64; 3]) -> [f64; 3] {
    matrix.map(|row| row[0] * v[0] + row[1] * v[1] + row[2] * v[2])
}

fn contrast(a: Rgb, b: Rgb) -> f64 {
    let [a, b] = [a, b].map(|c| times(&TO_XYZ, linear(c))[1] + 0.05);
    a.max(b) / a.min(b)
}

fn lab(light: [f64; 3]) -> [f64; 3] {
    let xyz = times(&TO_XYZ, light.map(|c| c.clamp(0.0, 1.0)));
    let white = [0.95047, 1.0, 1.08883];
    let f = [0, 1, 2].map(|k| {
        let t = xyz[k] / white[k];
        if t > 216.0 / 24389.0 { libm::cbrt(t) } else { (24389.0 / 27.0 * t + 16.0) / 116.0 }
    });
    [116.0 * f[1] - 16.0, 500.0 * (f[0] - f[1]), 200.0 * (f[1] - f[2])]
}

/// CIEDE2000.
fn distance(p: [f64; 3], q: [f64; 3]) -> f64 {
    let seventh = |c: f64| {
        let c7 = libm::pow(c, 7.0);
        libm::sqrt(c7 / (c7 + libm::pow(25.0, 7.0)))
    };
    let chroma = |c: [f64; 3]| libm::hypot(c[1], c[2]);
    let stretch = 1.0 + 0.5 * (1.0 - seventh(0.5 * (chroma(p) + chroma(q))));
    let polar = |c: [f64; 3]| {
        let a = stretch * c[1];
        let hue = if a == 0.0 && c[2] == 0.0 { 0.0 } else { libm::atan2(c[2], a).to_degrees().rem_euclid(360.0) };
        (c[0], libm::hypot(a, c[2]), hue)
    };
    let ((l1, c1, h1), (l2, c2, h2)) = (polar(p), polar(q));
    let turn = if c1 * c2 == 0.0 { 0.0 } else { (h2 - h1 + 180.0).rem_euclid(360.0) - 180.0 };
    let dh = 2.0 * libm::sqrt(c1 * c2) * libm::sin((0.5 * turn).to_radians());
    let (l, c) = (0.5 * (l1 + l2), 0.5 * (c1 + c2));
    let h = if c1 * c2 == 0.0 { h1 + h2 } else { (h1 + 0.5 * turn).rem_euclid(360.0) };
    let cosine = |degrees: f64| libm::cos(degrees.to_radians());
    let t = 1.0 - 0.17 * cosine(h - 30.0) + 0.24 * cosine(2.0 * h) + 0.32 * cosine(3.0 * h + 6.0)
        - 0.2 * cosine(4.0 * h - 63.0);
    let far = (l - 50.0) * (l - 50.0);
    let (sl, sc, sh) = (1.0 + 0.015 * far / libm::sqrt(20.0 + far), 1.0 + 0.045 * c, 1.0 + 0.015 * c * t);
    let bend = (h - 275.0) / 25.0;
    let rotation = -2.0 * seventh(c) * libm::sin((60.0 * libm::exp(-bend * bend)).to_radians());
    let (dl, dc, dh) = ((l2 - l1) / sl, (c2 - c1) / sc, dh / sh);
    libm::sqrt(dl * dl + dc * dc + dh * dh + rotation * dc * dh)
}

#[test]
fn the_distance_is_the_published_one() {
    // Sharma, Wu and Dalal 2005, table 1, pairs 1, 7 and 17.
    let cases = [
        ([50.0, 2.6772, -79.7751], [50.0, 0.0, -82.7485], 2.0425),
        ([50.0, 0.0, 0.0], [50.0, -1.0, 2.0], 2.3669),
        ([50.0, 2.5, 0.0], [73.0, 25.0, -18.0], 27.1492),
    ];
    for (p, q, expected) in cases {
        assert!((distance(p, q) - expected).abs() < 1e-4, "{p:?} {q:?}: {}", distance(p, q));
    }
}

#[test]
fn text_and_edges_can_be_seen() {
    for theme in THEMES {
        let palette = Palette::of(theme);
        for (k, group) in palette.groups.into_iter().enumerate() {
            let text = contrast(group, palette.paper);
            assert!(text >= 4.5, "{theme:?}, group {}: text {text:.2}", k + 1);
            let edge = contrast(group.over(palette.paper, palette.edge), palette.paper);
            assert!(edge >= 3.0, "{theme:?}, group {}: edge {edge:.2}", k + 1);
        }
        assert!(contrast(palette.ink, palette.paper) >= 7.0);
        assert!(contrast(palette.soft, palette.paper) >= 4.5);
    }
}

#[test]
fn groups_can_be_told_apart_by_everyone() {
    for theme in THEMES {
        let groups = Palette::of(theme).groups;
        for (vision, matrix) in &SEEN {
            let seen = groups.map(|g| lab(times(matrix, linear(g))));
            for a in 0..groups.len() {
                for b in a + 1..groups.len() {
                    let d = distance(seen[a], seen[b]);
                    assert!(d >= 17.0, "{theme:?}, {vision}: groups {} and {} are {d:.1} apart", a + 1, b + 1);
                }
            }
        }
    }
}
