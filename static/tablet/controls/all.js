/** The closed set of controls and the module of each, in the order of fieldkit/sheet/controls.py. */
import * as caution from "./caution.js";
import * as confirm from "./confirm.js";
import * as number from "./number.js";
import * as prove from "./prove.js";
import * as lock from "./lock.js";
import * as unlock from "./unlock.js";
import * as earth from "./earth.js";
import * as lift from "./lift.js";
import * as choice from "./choice.js";
import * as hold from "./hold.js";
import * as picture from "./picture.js";
import * as remark from "./remark.js";
import * as result from "./result.js";
import * as wait from "./wait.js";
import * as people from "./people.js";

export const CONTROLS = { caution, confirm, number, prove, lock, unlock, earth, lift, choice, hold, picture, remark, result, wait, people };
