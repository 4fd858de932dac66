//! The page's own styles name the same colours as the figure: a name beside a table is in its curve's colour.

use courseband_figure::{Palette, Rgb, Theme};

fn named(block: &str, name: &str) -> Rgb {
    let rest = block.split(&format!("--{name}: #")).nth(1).unwrap_or_else(|| panic!("--{name} is missing"));
    let code = u32::from_str_radix(&rest[..6], 16).expect("six digits");
    Rgb([(code >> 16) as u8, (code >> 8) as u8, code as u8])
}

#[test]
fn page_and_figure_have_the_same_colours() {
    let path = concat!(env!("CARGO_MANIFEST_DIR"), "/../../www/styles/vars.css");
    let styles = std::fs::read_to_string(path).expect("the page's colours");
    let (light, dark) = styles.split_once("prefers-color-scheme: dark").expect("two themes");
    for (block, theme) in [(light, Theme::Light), (dark, Theme::Dark)] {
        let palette = Palette::of(theme);
        for (k, group) in palette.groups.into_iter().enumerate() {
            assert_eq!(named(block, &format!("group-{}", k + 1)), group, "{theme:?}");
        }
        assert_eq!(named(block, "paper"), palette.paper, "{theme:?}");
        assert_eq!(named(block, "ink"), palette.ink, "{theme:?}");
        assert_eq!(named(block, "ink-soft"), palette.soft, "{theme:?}");
    }
}
