//! Colours and type: light and dark, one accent.

use egui::{Color32, Context, CornerRadius, FontFamily, FontId, Stroke, TextStyle, Theme, Visuals};

/// The accent: what can be grasped or is in progress.
pub const ACCENT: Color32 = Color32::from_rgb(0xd9, 0x6a, 0x1c);

/// Colours of the drawing.
#[derive(Clone, Copy, Debug)]
pub struct CanvasColours {
    /// Paper.
    pub paper: Color32,
    /// Grid lines.
    pub grid: Color32,
    /// Lines and lettering.
    pub ink: Color32,
    /// Dimensions and secondary lettering.
    pub faint: Color32,
    /// Fill of inserts.
    pub solid: Color32,
    /// Flow ports.
    pub port: Color32,
    /// Faults.
    pub fault: Color32,
}

impl CanvasColours {
    /// For a theme.
    pub fn new(dark: bool) -> Self {
        if dark {
            Self {
                paper: Color32::from_rgb(0x17, 0x1a, 0x1e),
                grid: Color32::from_rgb(0x25, 0x2a, 0x30),
                ink: Color32::from_rgb(0xe4, 0xe6, 0xe8),
                faint: Color32::from_rgb(0x93, 0x9b, 0xa4),
                solid: Color32::from_rgb(0x3a, 0x40, 0x48),
                port: Color32::from_rgb(0x5f, 0xb0, 0xd8),
                fault: Color32::from_rgb(0xff, 0x6f, 0x61),
            }
        } else {
            Self {
                paper: Color32::from_rgb(0xfb, 0xfa, 0xf7),
                grid: Color32::from_rgb(0xea, 0xe8, 0xe2),
                ink: Color32::from_rgb(0x22, 0x24, 0x27),
                faint: Color32::from_rgb(0x74, 0x78, 0x7d),
                solid: Color32::from_rgb(0xd9, 0xd7, 0xd0),
                port: Color32::from_rgb(0x1b, 0x6f, 0xa0),
                fault: Color32::from_rgb(0xc4, 0x2b, 0x1c),
            }
        }
    }
}

/// Set visuals and text sizes once.
pub fn apply(ctx: &Context, dark: bool, text_scale: f32) {
    ctx.set_theme(if dark { Theme::Dark } else { Theme::Light });
    let mut visuals = if dark {
        Visuals::dark()
    } else {
        Visuals::light()
    };
    let colours = CanvasColours::new(dark);
    visuals.panel_fill = if dark {
        Color32::from_rgb(0x1f, 0x23, 0x28)
    } else {
        Color32::from_rgb(0xf3, 0xf2, 0xee)
    };
    visuals.window_fill = visuals.panel_fill;
    visuals.extreme_bg_color = if dark {
        Color32::from_rgb(0x14, 0x17, 0x1a)
    } else {
        Color32::WHITE
    };
    visuals.selection.bg_fill = ACCENT.gamma_multiply(if dark { 0.45 } else { 0.35 });
    visuals.selection.stroke = Stroke::new(1.0, colours.ink);
    visuals.hyperlink_color = ACCENT;
    visuals.warn_fg_color = if dark {
        Color32::from_rgb(0xf0, 0xb4, 0x4c)
    } else {
        Color32::from_rgb(0x9a, 0x5b, 0x00)
    };
    visuals.error_fg_color = colours.fault;
    visuals.override_text_color = Some(colours.ink);
    for widget in [
        &mut visuals.widgets.noninteractive,
        &mut visuals.widgets.inactive,
        &mut visuals.widgets.hovered,
        &mut visuals.widgets.active,
        &mut visuals.widgets.open,
    ] {
        widget.corner_radius = CornerRadius::same(3);
    }
    ctx.set_visuals(visuals);
    ctx.all_styles_mut(|style| {
        let size = |points: f32| FontId::new(points * text_scale, FontFamily::Proportional);
        style.text_styles.insert(TextStyle::Body, size(13.0));
        style.text_styles.insert(TextStyle::Button, size(13.0));
        style.text_styles.insert(TextStyle::Heading, size(15.0));
        style.text_styles.insert(TextStyle::Small, size(11.0));
        style.text_styles.insert(
            TextStyle::Monospace,
            FontId::new(12.5 * text_scale, FontFamily::Monospace),
        );
        style.spacing.item_spacing = egui::vec2(6.0, 4.0);
        style.spacing.button_padding = egui::vec2(6.0, 2.0);
    });
}
