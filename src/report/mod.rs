//! Tables, figures, the page and the terminal summary; and whole-or-nothing writing of files.

mod area_table;
mod concise;
mod figures;
mod output_folder;
mod page;
mod runs_table;
mod sheet_report;
mod spectrum_table;
mod survey_table;
mod table;
mod terminal;

pub use area_table::area_csv;
pub use concise::concise;
pub use figures::{Figure, area_figure, file_stem, kappa_figure};
pub use output_folder::{OutputFolder, WriteError};
pub use page::{PageContent, PageSheet, page};
pub use runs_table::{RunSummary, runs_csv};
pub use sheet_report::SheetReport;
pub use spectrum_table::{KappaPoint, kappa_points, spectrum_csv};
pub use survey_table::survey_table;
pub use terminal::{SummaryStyle, summary};
