/** The answering half of a request, as next-auth fills it in outside the App Router. */
export class AuthReply {
  #status = 200;
  readonly #headers = new Headers({ "cache-control": "private, no-store" });
  #body: string | null = null;

  get location(): string | null {
    return this.#headers.get("location");
  }

  status(code: number): this {
    this.#status = code;
    return this;
  }

  /** Only asked for the cookies set so far. */
  getHeader(name: string): string[] {
    return name === "Set-Cookie" ? this.#headers.getSetCookie() : [];
  }

  setHeader(name: string, value: string | readonly string[]): this {
    this.#headers.delete(name);
    for (const one of [value].flat()) this.#headers.append(name, one);
    return this;
  }

  json(value: unknown): void {
    this.setHeader("content-type", "application/json").send(JSON.stringify(value));
  }

  send(value: unknown): void {
    if (value !== undefined) this.#body = typeof value === "string" ? value : JSON.stringify(value);
  }

  end(): void {
    this.#body = null;
  }

  toResponse(): Response {
    return new Response(this.#body, { status: this.#status, headers: this.#headers });
  }
}
