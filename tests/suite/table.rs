//! Tables of check values in `tests/data`: `#` lines with the source, a line of column names, rows.

/// A row with its column names.
#[derive(Clone, Debug)]
pub struct Row {
    names: Vec<String>,
    cells: Vec<String>,
}

/// The rows of a table. A broken file fails the test that reads it.
pub fn rows(text: &str) -> Vec<Row> {
    let mut lines = text
        .lines()
        .filter(|line| !line.starts_with('#') && !line.is_empty())
        .map(split);
    let names = lines.next().expect("a table has a line of names");
    let rows: Vec<Row> = lines
        .map(|cells| Row {
            names: names.clone(),
            cells,
        })
        .collect();
    assert!(
        !rows.is_empty() && rows.iter().all(|row| row.cells.len() == names.len()),
        "rows as long as the names"
    );
    rows
}

fn split(line: &str) -> Vec<String> {
    let mut cells = vec![String::new()];
    let mut quoted = false;
    for c in line.chars() {
        match c {
            '"' => quoted = !quoted,
            ',' if !quoted => cells.push(String::new()),
            _ => cells.last_mut().expect("there is always one").push(c),
        }
    }
    cells
}

impl Row {
    /// The text of a column.
    pub fn text(&self, name: &str) -> &str {
        let place = self.names.iter().position(|known| known == name);
        &self.cells[place.unwrap_or_else(|| panic!("no column {name}"))]
    }

    /// The number of a column; None where the cell is empty.
    pub fn number(&self, name: &str) -> Option<f64> {
        let text = self.text(name);
        (!text.is_empty()).then(|| {
            text.parse()
                .unwrap_or_else(|_| panic!("{name} holds {text}"))
        })
    }

    /// The number of a column that is never empty.
    pub fn get(&self, name: &str) -> f64 {
        self.number(name)
            .unwrap_or_else(|| panic!("{name} is empty"))
    }
}
