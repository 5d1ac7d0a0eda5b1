//! Fonts, type scale, and the palette for light and dark.

use std::sync::Arc;

use eframe::egui::{
    self, Color32, CornerRadius, FontData, FontDefinitions, FontFamily, FontId, Stroke, TextStyle, Theme,
};

use crate::drawing::Ink;

/// Colours of one theme.
#[derive(Debug, Clone, Copy)]
pub struct Palette {
    /// Canvas.
    pub paper: Color32,
    /// Bars and panes.
    pub panel: Color32,
    /// Text and main lines.
    pub ink: Color32,
    /// Labels.
    pub faint: Color32,
    /// Hairlines.
    pub hair: Color32,
    /// The one accent.
    pub accent: Color32,
    /// Errors.
    pub bad: Color32,
    /// Warnings, hazards.
    pub warn: Color32,
    /// Behind chosen text.
    pub wash: Color32,
    /// Behind dead squares, headers.
    pub shade: Color32,
    /// Hues for sets and products.
    pub hues: [Color32; 8],
}

const LIGHT: Palette = Palette {
    paper: Color32::from_rgb(0xfd, 0xfd, 0xfb),
    panel: Color32::from_rgb(0xf4, 0xf4, 0xf0),
    ink: Color32::from_rgb(0x1c, 0x1f, 0x24),
    faint: Color32::from_rgb(0x60, 0x67, 0x73),
    hair: Color32::from_rgb(0xd5, 0xd7, 0xd6),
    accent: Color32::from_rgb(0x0b, 0x6e, 0x6e),
    bad: Color32::from_rgb(0xb3, 0x26, 0x1e),
    warn: Color32::from_rgb(0x8f, 0x5f, 0x00),
    wash: Color32::from_rgb(0xd6, 0xec, 0xea),
    shade: Color32::from_rgb(0xee, 0xef, 0xed),
    hues: [
        Color32::from_rgb(0x1b, 0x6c, 0xa8),
        Color32::from_rgb(0xb0, 0x55, 0x2a),
        Color32::from_rgb(0x3f, 0x7d, 0x3a),
        Color32::from_rgb(0x8a, 0x4a, 0x9e),
        Color32::from_rgb(0xa0, 0x72, 0x1a),
        Color32::from_rgb(0x2f, 0x85, 0x83),
        Color32::from_rgb(0xa8, 0x3d, 0x5e),
        Color32::from_rgb(0x5a, 0x5f, 0xb0),
    ],
};

const DARK: Palette = Palette {
    paper: Color32::from_rgb(0x17, 0x19, 0x1c),
    panel: Color32::from_rgb(0x20, 0x23, 0x27),
    ink: Color32::from_rgb(0xe4, 0xe6, 0xe8),
    faint: Color32::from_rgb(0x9a, 0xa1, 0xab),
    hair: Color32::from_rgb(0x3a, 0x3f, 0x45),
    accent: Color32::from_rgb(0x5f, 0xc4, 0xbd),
    bad: Color32::from_rgb(0xf0, 0x7d, 0x74),
    warn: Color32::from_rgb(0xe0, 0xae, 0x4c),
    wash: Color32::from_rgb(0x1f, 0x45, 0x45),
    shade: Color32::from_rgb(0x27, 0x2b, 0x2f),
    hues: [
        Color32::from_rgb(0x6c, 0xb2, 0xe6),
        Color32::from_rgb(0xe8, 0x9a, 0x70),
        Color32::from_rgb(0x8c, 0xc9, 0x84),
        Color32::from_rgb(0xc9, 0x97, 0xdb),
        Color32::from_rgb(0xdd, 0xb6, 0x62),
        Color32::from_rgb(0x74, 0xc8, 0xc5),
        Color32::from_rgb(0xe8, 0x8b, 0xa8),
        Color32::from_rgb(0xa5, 0xa9, 0xf0),
    ],
};

/// The palette in force.
pub fn palette(visuals: &egui::Visuals) -> &'static Palette {
    if visuals.dark_mode { &DARK } else { &LIGHT }
}

impl Palette {
    /// The colour of a picture's ink.
    pub fn of(&self, ink: Ink) -> Color32 {
        match ink {
            Ink::Main => self.ink,
            Ink::Faint => self.faint,
            Ink::Hair => self.hair,
            Ink::Accent => self.accent,
            Ink::Bad => self.bad,
            Ink::Warn => self.warn,
            Ink::Wash => self.wash,
            Ink::Shade => self.shade,
            Ink::Hue(i) => self.hues[usize::from(i) % self.hues.len()],
        }
    }
}

/// The frame of a pane within a station: no box of its own, only room on the side where a hairline divides it from its
/// neighbour. Left, right, top, bottom in points.
pub fn pane(left: i8, right: i8, top: i8, bottom: i8) -> egui::Frame {
    egui::Frame::new().inner_margin(egui::Margin { left, right, top, bottom })
}

/// Semibold text.
pub fn strong() -> FontFamily {
    FontFamily::Name("strong".into())
}

/// Installs fonts and styles for both themes.
pub fn install(ctx: &egui::Context) {
    let mut fonts = FontDefinitions::empty();
    let files: [(&str, &'static [u8]); 4] = [
        ("text", include_bytes!("../../assets/fonts/Inter-Regular.otf")),
        ("strong", include_bytes!("../../assets/fonts/Inter-SemiBold.otf")),
        ("signs", include_bytes!("../../assets/fonts/DejaVuSans.ttf")),
        ("mono", include_bytes!("../../assets/fonts/DejaVuSansMono.ttf")),
    ];
    for (name, bytes) in files {
        fonts.font_data.insert(name.to_owned(), Arc::new(FontData::from_static(bytes)));
    }
    let list = |names: &[&str]| names.iter().map(|&n| n.to_owned()).collect::<Vec<_>>();
    fonts.families.insert(FontFamily::Proportional, list(&["text", "signs"]));
    fonts.families.insert(FontFamily::Monospace, list(&["mono", "signs"]));
    fonts.families.insert(strong(), list(&["strong", "signs"]));
    ctx.set_fonts(fonts);
    ctx.all_styles_mut(|s| {
        s.text_styles = [
            (TextStyle::Heading, FontId::new(15.0, strong())),
            (TextStyle::Body, FontId::new(13.0, FontFamily::Proportional)),
            (TextStyle::Button, FontId::new(13.0, FontFamily::Proportional)),
            (TextStyle::Small, FontId::new(11.0, FontFamily::Proportional)),
            (TextStyle::Monospace, FontId::new(12.5, FontFamily::Monospace)),
        ]
        .into();
        s.spacing.item_spacing = egui::vec2(8.0, 5.0);
        s.spacing.button_padding = egui::vec2(8.0, 3.0);
        s.spacing.menu_margin = egui::Margin::same(6);
        s.animation_time = 0.0;
    });
    for theme in [Theme::Light, Theme::Dark] {
        ctx.style_mut_of(theme, |s| {
            visuals(&mut s.visuals, if theme == Theme::Dark { &DARK } else { &LIGHT })
        });
    }
}

fn visuals(v: &mut egui::Visuals, p: &Palette) {
    v.panel_fill = p.panel;
    v.window_fill = p.panel;
    v.extreme_bg_color = p.paper;
    v.faint_bg_color = p.shade;
    v.window_stroke = Stroke::new(1.0, p.hair);
    v.selection.bg_fill = p.wash;
    v.selection.stroke = Stroke::new(1.0, p.accent);
    v.hyperlink_color = p.accent;
    v.warn_fg_color = p.warn;
    v.error_fg_color = p.bad;
    v.weak_text_color = Some(p.faint);
    v.widgets.noninteractive.fg_stroke = Stroke::new(1.0, p.ink);
    v.widgets.noninteractive.bg_stroke = Stroke::new(1.0, p.hair);
    v.widgets.inactive.fg_stroke = Stroke::new(1.0, p.ink);
    v.widgets.inactive.weak_bg_fill = p.shade;
    v.widgets.inactive.bg_stroke = Stroke::new(1.0, p.hair);
    v.widgets.hovered.fg_stroke = Stroke::new(1.0, p.ink);
    v.widgets.hovered.bg_stroke = Stroke::new(1.0, p.accent);
    v.widgets.active.bg_stroke = Stroke::new(1.0, p.accent);
    for w in [
        &mut v.widgets.noninteractive,
        &mut v.widgets.inactive,
        &mut v.widgets.hovered,
        &mut v.widgets.active,
        &mut v.widgets.open,
    ] {
        w.corner_radius = CornerRadius::same(3);
        w.expansion = 0.0;
    }
    v.window_corner_radius = CornerRadius::same(6);
    v.menu_corner_radius = CornerRadius::same(4);
    v.popup_shadow.blur = 8;
    v.window_shadow.blur = 16;
}
