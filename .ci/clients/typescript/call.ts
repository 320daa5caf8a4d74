// One call with the client generated from the contract. It compiles only if the generated types fit what is sent and read,
// and it ends with an error unless the service answers what the arithmetic below says.
import createClient from "openapi-fetch";
import type { components, paths } from "./leat";

const base = process.argv[2];
if (base === undefined) throw new Error("usage: node call.js ADDRESS");
// The contract gives answers in several media types; this client asks for JSON, which is what it gets unless it says otherwise.
const client = createClient<paths, "application/json" | "application/problem+json">({ baseUrl: base });

// A rectangle's critical depth is (q^2/(g cos))^(1/3) for a discharge q per unit width on a bed with that cosine (the energy's minimum, common
// practice); with q^2 = g cos it is 1 m.
const width = 2;
const gravity = 9.80665;
const bed_slope = 0.001;
const unitDischarge = Math.sqrt(gravity * Math.sqrt(1 - bed_slope * bed_slope));
const section: components["schemas"]["Section"] = { kind: "rectangular", bottom_width: width };
const { data, error } = await client.POST("/v1/depths", {
  params: { query: { detail: "brief" } },
  body: { id: "OST-RD-0001", section, roughness: { manning: 0.02 }, bed_slope, discharge: width * unitDischarge },
});
if (error !== undefined) throw new Error(`${error.title}: ${error.detail}`);
const critical: number | null = data.critical_depth;
if (critical === null || !(Math.abs(critical - 1) <= 1e-9)) throw new Error(`critical depth is ${critical}, want 1`);
if (data.slope_class !== "mild") throw new Error(`slope class is ${data.slope_class}, want mild`);

const refused = await client.POST("/v1/section", {
  body: { section: { kind: "circular", diameter: 0.6 }, depth: 0.7 },
});
if (refused.error === undefined || refused.response.status !== 422) throw new Error("a depth above the crown was not refused");

// @ts-expect-error a member of another kind does not compile
const mixed: components["schemas"]["Section"] = { kind: "circular", bottom_width: 1 };
void mixed;
console.log("TypeScript client: critical depth", critical, "m, slope", data.slope_class);
