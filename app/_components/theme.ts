/** A theme that a person chose; without one the system's preference holds. */
export type Theme = "light" | "dark";

export const themeCookie = "theme";

/** The chosen theme of a cookie's value; undefined where none was chosen or the value is not one of ours. */
export function readTheme(value: string | undefined): Theme | undefined {
  return value === "light" || value === "dark" ? value : undefined;
}
