//! The description of all this, from the code.

use axum::Extension;
use axum::body::Bytes;
use axum::http::header::CONTENT_TYPE;
use axum::response::{IntoResponse, Response};
use utoipa::OpenApi;
use utoipa::openapi::path::{Operation, PathItem};
use utoipa::openapi::{ContentBuilder, Ref, RefOr, ResponseBuilder};
use utoipa_axum::router::OpenApiRouter;

use super::App;
use crate::answers::Problem;

#[derive(OpenApi)]
#[openapi(
    info(
        title = "washbell",
        description = "Which membrane train to clean by when, with what and why, and afterwards \
                       whether the clean worked.\n\nTimes are RFC 3339; requests must name an \
                       offset, answers carry the plant's own. Spans are half-open. Whatever is \
                       not a success is a problem after RFC 9457. Clients should pass over \
                       fields that they do not know."
    ),
    components(schemas(Problem)),
    tags(
        (name = "doors in", description = "Exports and readings, and what became of them"),
        (name = "answers", description = "What stands, and what it is worked from"),
        (name = "acts", description = "What people decide and record"),
        (name = "service", description = "The service itself"),
    )
)]
struct Head;

/// The document as it is served.
#[derive(Clone, Debug)]
pub struct Document(Bytes);

/// Routes with the head of the document.
pub fn described(routes: OpenApiRouter<App>) -> OpenApiRouter<App> {
    OpenApiRouter::with_openapi(Head::openapi()).merge(routes)
}

impl Document {
    /// The document of what was described, with the problems that every operation can answer.
    pub fn of(mut described: utoipa::openapi::OpenApi) -> Self {
        for item in described.paths.paths.values_mut() {
            for operation in operations(item) {
                operation.responses.responses.insert("default".to_owned(), problem());
            }
        }
        // The document is made of texts only: it can be written.
        Self(Bytes::from(described.to_json().unwrap_or_default()))
    }
}

fn operations(item: &mut PathItem) -> impl Iterator<Item = &mut Operation> {
    [&mut item.get, &mut item.put, &mut item.post, &mut item.delete, &mut item.patch]
        .into_iter()
        .flatten()
}

fn problem() -> RefOr<utoipa::openapi::Response> {
    let content = ContentBuilder::new().schema(Some(Ref::from_schema_name("Problem"))).build();
    RefOr::T(
        ResponseBuilder::new()
            .description("A problem: what is wrong, and what to do")
            .content("application/problem+json", content)
            .build(),
    )
}

/// This document
#[utoipa::path(
    get, path = "/openapi.json", tag = "service", operation_id = "getDescription",
    responses((status = 200, description = "OpenAPI 3.1", body = Object, content_type = "application/json"))
)]
pub async fn document(Extension(document): Extension<Document>) -> Response {
    ([(CONTENT_TYPE, "application/json")], document.0).into_response()
}
