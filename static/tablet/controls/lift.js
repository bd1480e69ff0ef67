/** Lift: the stick comes off. Told by the same screen as earth, which reads the control's name. */
export { mount } from "./earth.js";
