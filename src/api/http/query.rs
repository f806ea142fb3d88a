//! Parameters of a query: those there are, and no others.

use axum::extract::{FromRequestParts, Query};
use axum::http::request::Parts;
use serde::Deserialize;
use serde::de::DeserializeOwned;
use utoipa::IntoParams;

use super::Failure;
use crate::answers::ProblemKind;
use crate::base::nearest;

/// The parameters of a query. Their description is also the list of those there are.
#[derive(Clone, Debug)]
pub struct ApiQuery<T>(pub T);

/// For addresses that take no parameter.
#[derive(Clone, Copy, Debug, Deserialize, IntoParams)]
pub struct NoQuery {}

impl<S: Send + Sync, T: DeserializeOwned + IntoParams> FromRequestParts<S> for ApiQuery<T> {
    type Rejection = Failure;

    async fn from_request_parts(parts: &mut Parts, _: &S) -> Result<Self, Failure> {
        let unreadable = |detail: String| ProblemKind::BadRequest.problem(detail);
        let Query(pairs) = Query::<Vec<(String, String)>>::try_from_uri(&parts.uri)
            .map_err(|e| unreadable(format!("The query cannot be read: {}.", e.body_text())))?;
        let known: Vec<String> = T::into_params(|| None).into_iter().map(|p| p.name).collect();
        for (name, _) in &pairs {
            if !known.contains(name) {
                return Err(unreadable(unknown(name, &known)).into());
            }
        }
        let Query(value) = Query::<T>::try_from_uri(&parts.uri).map_err(|e| {
            let text = e.body_text();
            let why = text.split_once(": ").map_or(text.as_str(), |(_, why)| why);
            unreadable(format!("The query cannot be taken: {why}."))
        })?;
        Ok(Self(value))
    }
}

fn unknown(name: &str, known: &[String]) -> String {
    let near = nearest(name, known.iter().map(String::as_str));
    let near = near.map_or(String::new(), |n| format!(" Did you mean `{n}`?"));
    let there = match known {
        [] => "this address takes none".to_owned(),
        _ => format!("there are {}", known.join(", ")),
    };
    format!("There is no parameter `{name}` here; {there}.{near}")
}
