import { describe, expect, it, vi } from "vitest";
import { PrintOrder } from "@/app/_components/print/print-order";

function page() {
  const prints: (() => void)[] = [];
  const order = new PrintOrder((done) => prints.push(done));
  return { order, prints };
}

describe("PrintOrder", () => {
  it("prints at once where no table is on the page", () => {
    const { order, prints } = page();
    order.order();
    expect(prints).toHaveLength(1);
  });

  it("waits for every table, and prints once", () => {
    const { order, prints } = page();
    const [devices, sets] = [{}, {}];
    order.join(devices);
    order.join(sets);
    order.order();
    order.order();
    order.report(devices);
    order.report(devices);
    expect(prints).toHaveLength(0);
    order.report(sets);
    order.report(sets);
    expect(prints).toHaveLength(1);
  });

  it("holds the rows until the print is over, and tells who watches", () => {
    const { order, prints } = page();
    const told = vi.fn();
    const table = {};
    order.join(table);
    const stop = order.watch(told);
    order.order();
    expect(order.pending).toBe(true);
    order.report(table);
    expect(order.pending).toBe(true);
    prints[0]?.();
    expect(order.pending).toBe(false);
    expect(told).toHaveBeenCalledTimes(3);
    stop();
    order.order();
    expect(told).toHaveBeenCalledTimes(3);
  });

  it("asks each table anew, and takes no report before that", () => {
    const { order, prints } = page();
    const table = {};
    order.join(table);
    order.report(table);
    order.order();
    expect(prints).toHaveLength(0);
    order.report(table);
    // A browser that never said the first was over.
    order.order();
    expect(prints).toHaveLength(1);
    order.report(table);
    expect(prints).toHaveLength(2);
    prints[0]?.();
    expect(order.pending).toBe(false);
  });

  it("does not wait for a table that left the page", () => {
    const { order, prints } = page();
    const leave = order.join({});
    order.order();
    leave();
    expect(prints).toHaveLength(1);
  });
});
