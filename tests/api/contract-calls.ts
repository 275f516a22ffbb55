/**
 * The calls that the contract promises to outsiders (its section 7), written by hand: `METHOD path status query…`.
 * The status of success stands where the contract names one, `-` where it doesn't.
 */
export const CONTRACT_CALLS = `
GET /families -
POST /families -
GET /families/{code} -
POST /families/{code}/revisions -
POST /families/{code}/revisions/{n}/submit -
POST /families/{code}/revisions/{n}/decisions -
POST /families/{code}/layouts/lint 200
GET /families/{code}/layouts -
POST /families/{code}/layouts 201
GET /families/{code}/layouts/{version} -
PUT /families/{code}/layouts/{version} -
DELETE /families/{code}/layouts/{version} -
POST /families/{code}/layouts/{version}/submit -
POST /families/{code}/layouts/{version}/decisions -
POST /families/{code}/layouts/{version}/retire -
GET /equipment -
POST /equipment -
PATCH /equipment/{code} -
GET /lots -
POST /lots -
GET /lots/{code} -
POST /lots/{code}/devices -
GET /lots/{code}/runs -
POST /lots/{code}/runs 201 purpose equipment addDevices supersedes reason
POST /lots/{code}/derivations 202 preview
GET /derivations/{id} -
GET /derivations/{id}/devices -
POST /derivations/{id}/decisions -
POST /lots/{code}/coefficients 201 referenceC capacityKg
GET /lots/{code}/coefficients -
GET /lots/{code}/packages -
POST /lots/{code}/packages 202
GET /packages/{id} -
GET /packages/{id}/images -
GET /packages/{id}/images/{serial} -
GET /packages/{id}/manifest -
GET /packages/{id}/bundle -
GET /compare - from to
POST /packages/{id}/waivers -
POST /packages/{id}/submit -
POST /packages/{id}/take-back -
POST /packages/{id}/decisions -
POST /packages/{id}/release -
POST /packages/{id}/withdraw -
POST /packages/{id}/rebuild 202
POST /lots/{code}/reinstatements -
GET /lots/{code}/reinstatements -
POST /reinstatements/{id}/decisions -
GET /lots/{code}/rewrites -
POST /devices/{serial}/events -
GET /signing-keys -
GET /stations -
POST /stations -
POST /stations/{id}/keys -
DELETE /stations/{id}/keys/{key} -
GET /station/live -
GET /station/packages/{id}/bundle -
POST /station/writes -
GET /devices/{serial} -
POST /devices/{serial}/dump -
POST /dumps -
GET /trace/impact - run derivation layout package equipment from to
GET /ledger -
GET /ledger/verify 200
GET /ledger/head -
GET /people -
POST /people -
PATCH /people/{id} -
GET /account/keys -
POST /account/keys -
DELETE /account/keys/{id} -
`;

/** Lists of the contract: `items` and `next`, `limit` and `cursor`. */
export const CONTRACT_LISTS = `
/families /families/{code}/layouts /equipment /lots /lots/{code}/runs /derivations/{id}/devices /lots/{code}/coefficients
/lots/{code}/packages /packages/{id}/images /compare /lots/{code}/reinstatements /lots/{code}/rewrites /stations
/trace/impact /ledger /people /account/keys
`;
