//! Ids under several groups: what that means is asked, and the answer acted on.

use super::*;
use crate::reading::Topic;
use crate::request::SharedIds;

impl Observer<'_> {
    /// `text`: which ids are under several groups. Without an answer they are different subjects.
    pub(super) fn shared_ids(&mut self, text: &str, group: usize, subjects: &Subjects) {
        let different = "taken for different subjects, numbered anew in each group";
        match self.request.shared_ids {
            None => {
                self.notes.push(format!("{text}: {different}."));
                self.ask_shared_ids(format!("{text}. What does that mean?"), false);
            }
            Some(SharedIds::Different) => self.notes.push(format!("{text}: {different}, as answered.")),
            Some(SharedIds::Same) => self.ask_shared_ids(
                format!(
                    "{text}, and this is said to be one subject each time. Such a crossover cannot be analysed here: \
                     groups are compared as different subjects, and the order of treatments would be passed over. \
                     Take a table in which each subject has one group, or answer otherwise."
                ),
                true,
            ),
            Some(SharedIds::Mistake) => {
                let rows = subjects.doubtful_rows();
                self.list_doubtful(&rows, group);
                let lines: Vec<usize> = rows.iter().map(|&kept| self.line(kept)).collect();
                self.ask_shared_ids(
                    format!(
                        "{text}, by mistake. Correct the id or the group in {}, or exclude what is wrong there.",
                        crate::error::rows(&lines)
                    ),
                    true,
                );
            }
        }
    }

    fn ask_shared_ids(&mut self, text: String, needs_answer: bool) {
        self.questions.push(Question {
            topic: Topic::Ids,
            text,
            choices: vec![
                "Different subjects: numbering restarts in each group".to_string(),
                "The same subjects under each: this design is not handled".to_string(),
                "A typing error: correct the group or exclude the rows".to_string(),
            ],
            needs_answer,
        });
    }

    fn list_doubtful(&mut self, rows: &[usize], group: usize) {
        for &kept in rows {
            let row = self.kept[kept] as usize;
            let shown = self.table.shown_column(row, group);
            self.problems.add(ProblemKind::SharedId, self.table.line(row), shown, self.table.cell(row, group), || {
                "Its id stands under another group too. Correct the id or the group, or exclude the row.".to_string()
            });
        }
    }
}
