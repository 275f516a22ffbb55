/** Bytes as a stream that asks for the next piece when the client has taken the last one. */
export function streamOf(pieces: AsyncIterable<Uint8Array>): ReadableStream<Uint8Array> {
  const iterator = pieces[Symbol.asyncIterator]();
  return new ReadableStream<Uint8Array>(
    {
      async pull(controller) {
        const { done, value } = await iterator.next();
        if (done) controller.close();
        else controller.enqueue(value);
      },
      async cancel() {
        await iterator.return?.();
      },
    },
    { highWaterMark: 0 },
  );
}

/** The same of texts, as UTF-8. */
export function textStreamOf(parts: AsyncIterable<string>): ReadableStream<Uint8Array> {
  return streamOf(encode(parts));
}

async function* encode(parts: AsyncIterable<string>): AsyncGenerator<Uint8Array> {
  // An empty piece would be taken for nothing to send and end the stream's turn.
  for await (const part of parts) if (part !== "") yield Buffer.from(part);
}
