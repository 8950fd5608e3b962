/** The door of the numeric room: distributions, joint distributions, random streams, linear algebra, optimisers. */
export { DomainError } from "./domain-error.ts";
