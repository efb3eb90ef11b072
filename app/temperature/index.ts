export { fitTemperatureSeries, type TemperaturePoint } from "./fit-series.ts";
export { temperatureSeriesOf, type TemperatureReading } from "./series-of-results.ts";
