//! Figures as SVG text.

mod area_figure;
mod axis;
mod canvas;
mod file_stem;
mod kappa_figure;
mod marker;
mod plot_frame;

pub use area_figure::area_figure;
pub use canvas::Figure;
pub use file_stem::file_stem;
pub use kappa_figure::kappa_figure;
