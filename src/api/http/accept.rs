//! What form of answer a client would rather have, RFC 9110 section 12.5.1.

use axum::http::HeaderMap;
use axum::http::header::ACCEPT;

/// Weight in thousandths that the client gives a media type; 0 where it does not take it.
fn weight(header: &str, media: &str) -> u32 {
    let class = media.split('/').next().unwrap_or("");
    let mut best = (0, 0);
    for part in header.split(',') {
        let mut fields = part.split(';').map(str::trim);
        let range = fields.next().unwrap_or("").to_ascii_lowercase();
        let closeness = match range.as_str() {
            r if r == media => 3,
            r if r.strip_suffix("/*") == Some(class) => 2,
            "*/*" => 1,
            _ => continue,
        };
        let q = fields
            .find_map(|f| f.strip_prefix("q=").or(f.strip_prefix("Q=")))
            .and_then(|q| q.parse::<f64>().ok())
            .unwrap_or(1.0);
        let q = (q.clamp(0.0, 1.0) * 1000.0) as u32;
        if closeness > best.0 {
            best = (closeness, q);
        }
    }
    best.1
}

/// Which of the offered media types the client would rather have: the first of those it weighs
/// highest. The first one where it says nothing, or takes none of them.
pub fn prefers<'a>(headers: &HeaderMap, offered: &[&'a str]) -> &'a str {
    let first = offered.first().copied().unwrap_or("");
    let Some(header) = headers.get(ACCEPT).and_then(|h| h.to_str().ok()) else { return first };
    let mut best = (0, first);
    for media in offered {
        let q = weight(header, media);
        if q > best.0 {
            best = (q, media);
        }
    }
    best.1
}

/// Whether a person's browser asks.
pub fn prefers_html(headers: &HeaderMap) -> bool {
    prefers(headers, &["application/json", "text/html"]) == "text/html"
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn weights_and_closeness_decide() {
        let of = |accept: &str| {
            let mut headers = HeaderMap::new();
            headers.insert(ACCEPT, accept.parse().unwrap());
            prefers(&headers, &["application/json", "text/csv", "text/html"])
        };
        assert_eq!(of("*/*"), "application/json");
        assert_eq!(of("text/csv"), "text/csv");
        assert_eq!(of("text/*;q=0.5, application/json;q=0.4"), "text/csv");
        assert_eq!(of("text/html,application/xml;q=0.9,*/*;q=0.8"), "text/html");
        assert_eq!(of("*/*, application/json;q=0"), "text/csv");
        assert_eq!(of("image/png"), "application/json");
        assert_eq!(prefers(&HeaderMap::new(), &["a/b", "c/d"]), "a/b");
    }
}
