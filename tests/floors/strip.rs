//! What of a source file is code that is shipped.

/// Blanks comments, texts and what stands under `#[cfg(test)]`, and keeps the lines. Answers the
/// names of modules in other files that are tests, too.
pub fn strip(text: &str) -> (String, Vec<String>) {
    let mut code = blank_words(text);
    let mut tests = Vec::new();
    let mut from = 0;
    while let Some(at) = code[from..].find("#[cfg(test)]").map(|at| from + at) {
        let end = end_of_item(&code, at);
        let item = &code[at..end];
        if let Some(name) = item.split("mod ").nth(1).and_then(|m| m.strip_suffix(';')) {
            tests.push(name.trim().to_owned());
        }
        let blanks: String = item.chars().map(blank).collect();
        code.replace_range(at..end, &blanks);
        from = at;
    }
    (code, tests)
}

/// The end of the item that begins at `at`: its semicolon, or the brace that closes it.
fn end_of_item(code: &str, at: usize) -> usize {
    let mut depth = 0;
    for (i, c) in code[at..].char_indices() {
        match c {
            '{' => depth += 1,
            '}' if depth == 1 => return at + i + 1,
            '}' => depth -= 1,
            ';' if depth == 0 => return at + i + 1,
            _ => {}
        }
    }
    code.len()
}

/// Every character of comments, texts and quoted characters becomes a blank.
fn blank_words(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    let mut rest = text;
    while let Some(c) = rest.chars().next() {
        let after_word = out.chars().next_back().is_some_and(super::is_word);
        let n = match c {
            '/' if rest.starts_with("//") => rest.find('\n').unwrap_or(rest.len()),
            '/' if rest.starts_with("/*") => rest.find("*/").map_or(rest.len(), |n| n + 2),
            'r' if !after_word => raw_length(&rest[1..]).map_or(0, |n| n + 1),
            '"' => 1 + quoted_length(&rest[1..], '"'),
            '\'' => char_length(rest),
            _ => 0,
        };
        if n == 0 {
            out.push(c);
            rest = &rest[c.len_utf8()..];
        } else {
            out.extend(rest[..n].chars().map(blank));
            rest = &rest[n..];
        }
    }
    out
}

fn blank(c: char) -> char {
    if c == '\n' { '\n' } else { ' ' }
}

/// Length of a raw text without its `r`; `None` where there is none.
fn raw_length(rest: &str) -> Option<usize> {
    let hashes = rest.bytes().take_while(|b| *b == b'#').count();
    let body = rest[hashes..].strip_prefix('"')?;
    let end = format!("\"{}", "#".repeat(hashes));
    Some(hashes + 1 + body.find(&end)? + end.len())
}

/// Length up to the closing mark, which counts.
fn quoted_length(rest: &str, mark: char) -> usize {
    let mut escaped = false;
    for (i, c) in rest.char_indices() {
        if c == mark && !escaped {
            return i + 1;
        }
        escaped = c == '\\' && !escaped;
    }
    rest.len()
}

/// Length of a quoted character; 0 for a lifetime.
fn char_length(rest: &str) -> usize {
    let mut chars = rest.chars().skip(1);
    match (chars.next(), chars.next()) {
        (Some('\\'), _) => 1 + quoted_length(&rest[1..], '\''),
        (Some(c), Some('\'')) => 2 + c.len_utf8(),
        _ => 0,
    }
}
