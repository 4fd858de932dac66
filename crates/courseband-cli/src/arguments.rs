//! The command's words. Two forms and three options: a library would be larger than what it saves.

/// What is asked.
#[derive(Debug, PartialEq, Eq)]
pub(crate) enum Task {
    Help,
    Version,
    Find(Ask),
    Check(Ask),
}

/// Files of a task.
#[derive(Debug, Default, PartialEq, Eq)]
pub(crate) struct Ask {
    pub(crate) table: String,
    pub(crate) plan: Option<String>,
    pub(crate) out: Option<String>,
}

impl Task {
    /// Reads the command's words.
    pub(crate) fn parse(arguments: &[String]) -> Result<Task, String> {
        if arguments.iter().any(|a| a == "--help" || a == "-h") {
            return Ok(Task::Help);
        }
        if arguments.iter().any(|a| a == "--version") {
            return Ok(Task::Version);
        }
        let (checking, rest) = match arguments.split_first() {
            Some((first, rest)) if first == "check" => (true, rest),
            _ => (false, arguments),
        };
        let ask = Ask::parse(rest)?;
        if checking && ask.out.is_some() {
            return Err("'check' prints to standard output and takes no --out.".into());
        }
        if ask.table == "-" && ask.plan.as_deref() == Some("-") {
            return Err("Only one of the table and the plan can come from standard input.".into());
        }
        Ok(if checking { Task::Check(ask) } else { Task::Find(ask) })
    }
}

impl Ask {
    fn parse(words: &[String]) -> Result<Ask, String> {
        let mut ask = Ask::default();
        let mut tables = Vec::new();
        let mut words = words.iter();
        while let Some(word) = words.next() {
            let slot = match word.as_str() {
                "--plan" => &mut ask.plan,
                "--out" => &mut ask.out,
                other if other.starts_with("--") => {
                    return Err(format!("There is no option '{other}'. See 'courseband --help'."));
                }
                table => {
                    tables.push(table.to_string());
                    continue;
                }
            };
            if slot.is_some() {
                return Err(format!("{word} is given twice. Give it once."));
            }
            let Some(value) = words.next() else {
                return Err(format!("{word} needs a file name after it."));
            };
            *slot = Some(value.clone());
        }
        match tables.as_slice() {
            [] => Err("Name the table to read, or '-' for standard input. See 'courseband --help'.".into()),
            [one] => Ok(Ask { table: one.clone(), ..ask }),
            [_, second, ..] => Err(format!("'{second}' is one name too many: only one table can be read.")),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn parse(line: &str) -> Result<Task, String> {
        Task::parse(&line.split_whitespace().map(String::from).collect::<Vec<_>>())
    }

    #[test]
    fn forms() {
        let ask = |plan: Option<&str>, out: Option<&str>| Ask {
            table: "t.csv".into(),
            plan: plan.map(String::from),
            out: out.map(String::from),
        };
        assert_eq!(parse("t.csv --plan p.json --out f.json"), Ok(Task::Find(ask(Some("p.json"), Some("f.json")))));
        assert_eq!(parse("--plan p.json t.csv"), Ok(Task::Find(ask(Some("p.json"), None))));
        assert_eq!(parse("check t.csv"), Ok(Task::Check(ask(None, None))));
        for wrong in ["", "a b", "a --plan", "a --plan p --plan q", "a --nonsense", "check a --out f", "- --plan -"] {
            assert!(parse(wrong).is_err(), "{wrong}");
        }
    }
}
