//! The project's own colours, for a light page, a dark page and white paper.
//!
//! Six colours for groups, chosen by a search for the largest least distance
//! between any two of them as seen with usual vision and with each of the three
//! colour vision deficiencies, among quiet colours that text can be written in.
//! `tests.rs` measures them.

use crate::view::Theme;

/// A colour of the display, sRGB.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Rgb(pub [u8; 3]);

impl Rgb {
    const fn hex(code: u32) -> Self {
        Rgb([(code >> 16) as u8, (code >> 8) as u8, code as u8])
    }

    /// This colour laid over another with a share of its own, as displays mix.
    #[must_use]
    pub fn over(self, ground: Rgb, alpha: f64) -> Rgb {
        let mix = |k: usize| f64::from(self.0[k]) * alpha + f64::from(ground.0[k]) * (1.0 - alpha);
        Rgb([0, 1, 2].map(|k| mix(k).round() as u8))
    }
}

/// Colours of one surface.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Palette {
    /// The surface.
    pub paper: Rgb,
    /// Text, the zero line.
    pub ink: Rgb,
    /// Captions, labels of axes.
    pub soft: Rgb,
    /// Lines of the grid.
    pub hair: Rgb,
    /// Groups, in their order.
    pub groups: [Rgb; 6],
    /// Share of a group's colour in its band.
    pub band: f64,
    /// Share of a group's colour in a band's edge.
    pub edge: f64,
    /// Share of a group's colour in a subject's trace.
    pub trace: f64,
}

impl Palette {
    /// The colours of a theme.
    #[must_use]
    pub const fn of(theme: Theme) -> Palette {
        match theme {
            Theme::Light => LIGHT,
            Theme::Dark => DARK,
            Theme::Print => PRINT,
        }
    }
}

const LIGHT: Palette = Palette {
    paper: Rgb::hex(0xfb_fa_f7),
    ink: Rgb::hex(0x21_26_2c),
    soft: Rgb::hex(0x58_5f_68),
    hair: Rgb::hex(0xe4_e1_d9),
    groups: LIGHT_GROUPS,
    band: 0.12,
    edge: 0.79,
    trace: 0.2,
};

const LIGHT_GROUPS: [Rgb; 6] = [
    Rgb::hex(0x23_1c_22),
    Rgb::hex(0x8d_6d_29),
    Rgb::hex(0x79_64_bc),
    Rgb::hex(0x2c_7a_70),
    Rgb::hex(0x60_2d_0e),
    Rgb::hex(0x05_38_75),
];

const DARK: Palette = Palette {
    paper: Rgb::hex(0x15_18_1b),
    ink: Rgb::hex(0xe9_e7_e2),
    soft: Rgb::hex(0xa9_ae_b4),
    hair: Rgb::hex(0x2c_31_36),
    groups: [
        Rgb::hex(0x8e_8f_8e),
        Rgb::hex(0xc6_d5_6c),
        Rgb::hex(0xe7_be_fe),
        Rgb::hex(0x8c_de_c4),
        Rgb::hex(0xb5_77_27),
        Rgb::hex(0x6b_82_dc),
    ],
    band: 0.16,
    edge: 0.74,
    trace: 0.24,
};

const PRINT: Palette = Palette {
    paper: Rgb::hex(0xff_ff_ff),
    ink: Rgb::hex(0x00_00_00),
    soft: Rgb::hex(0x3d_42_48),
    hair: Rgb::hex(0xdd_dd_dd),
    groups: LIGHT_GROUPS,
    band: 0.12,
    edge: 0.78,
    trace: 0.25,
};

#[cfg(test)]
mod tests;
