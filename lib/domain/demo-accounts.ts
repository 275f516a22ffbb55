/** E-mail domain of the demo's invented maker; `.example` can be nobody's (RFC 2606). */
export const DEMO_DOMAIN = "marram.example";

/** Password of every account of the demo. It guards nothing and is printed at start. */
export const DEMO_PASSWORD = "trim-demo-2026";
