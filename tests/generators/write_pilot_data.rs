//! Writes the invented pilot data of the on-board spending scenario.

use std::path::Path;

fn main() -> std::io::Result<()> {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("../scenarios/on-board-spending.csv");
    std::fs::write(path, gaussgap_tests::pilot_data::on_board_spending_csv())
}
