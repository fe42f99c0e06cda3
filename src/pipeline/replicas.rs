//! `replica_of`: which runs may be pooled.

use super::diagnostics::{Diagnostic, Diagnostics};
use super::file::{RunEntry, SheetEntry};
use super::plan::RunPlan;
use super::table_reader::Written;

/// A replica names another run of its sheet that is no replica itself and was held at the same temperature and tension.
pub(super) fn check_replicas(sheet: &SheetEntry, runs: &[(&RunEntry, RunPlan)], problems: &mut Diagnostics) {
    for (entry, run) in runs {
        let Some(named) = &entry.replica_of else { continue };
        let refuse = |message: String, label: &str| Diagnostic::error(message).at(named.span.clone(), label);
        if named.value == run.name {
            problems.push(
                refuse(
                    format!("run `{}` is a replica of itself", run.name),
                    "expected another run of this sheet",
                )
                .help("remove `replica_of`, or name the run with the other seed"),
            );
            continue;
        }
        let Some((original_entry, original)) = runs.iter().find(|(_, other)| other.name == named.value)
        else {
            // Where a run could not be resolved its name is not known, and this may be it.
            if runs.len() == sheet.runs.len() {
                let names: Vec<&str> = runs
                    .iter()
                    .map(|(_, run)| run.name.as_str())
                    .filter(|name| *name != run.name)
                    .collect();
                problems.push(
                    refuse(
                        format!("no run of this sheet is named `{}`", named.value),
                        "expected a run of this sheet",
                    )
                    .help(match names.as_slice() {
                        [] => "the sheet has no other run".to_owned(),
                        names => format!("its other runs are {}", names.join(", ")),
                    }),
                );
            }
            continue;
        };
        if let Some(first) = &original.replica_of {
            problems.push(
                refuse(
                    format!("run `{}` is a replica itself", original.name),
                    "expected a run that is no replica",
                )
                .help(format!(
                    "replicas all name one run: write replica_of = \"{first}\""
                )),
            );
        }
        if original.temperature != run.temperature {
            problems.push(different(
                "temperature",
                &original.name,
                named,
                original_entry.temperature.as_ref(),
            ));
        }
        if original.tension != run.tension {
            let place = entry.tension.as_ref().or(original_entry.tension.as_ref());
            problems.push(different("tension", &original.name, named, place));
        }
    }
}

fn different(
    what: &str,
    original: &str,
    named: &Written<String>,
    place: Option<&Written<f64>>,
) -> Diagnostic {
    let refused = Diagnostic::error(format!("run `{original}` states another {what}"))
        .at(named.span.clone(), format!("expected a run of the same {what}"))
        .help(format!(
            "only runs of the same conditions are pooled: correct the {what}, or remove `replica_of`"
        ));
    match place {
        Some(place) => refused.related(place.span.clone(), "one of the two is stated here"),
        None => refused,
    }
}
