//! How a table becomes CSV text: comma separated, one header row, line feeds, quotes only where a cell needs them.

/// CSV text of a header and rows of as many cells.
pub(super) fn csv_text(header: &[&str], rows: impl Iterator<Item = Vec<String>>) -> String {
    let mut writer = csv::WriterBuilder::new().from_writer(Vec::new());
    let in_memory = "writing rows of equal length to memory cannot fail";
    writer.write_record(header).expect(in_memory);
    for row in rows {
        writer.write_record(&row).expect(in_memory);
    }
    let bytes = writer.into_inner().expect(in_memory);
    String::from_utf8(bytes).expect("the cells are UTF-8")
}
