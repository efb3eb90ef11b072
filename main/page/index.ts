export { answerPage, listPageFiles, plainAnswer, type PageAnswer, type PageFiles } from "./page-files.ts";
export { contentPolicy, pageHeaders } from "./policy.ts";
export { mediaType } from "./media-type.ts";
export { findPlace, type Place } from "./place.ts";
export { readDemoSeries, readNamedFiles, SPECTRUM_ENDINGS } from "./named-files.ts";
