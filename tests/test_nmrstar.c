/* NMR-STAR 3: chains from assemblies, addresses by index or author, OR and AND, trees of version 3.0, torsions, what is passed over.
 *
 * Tags and their meaning: the NMR-STAR dictionary of the Biological Magnetic Resonance Data Bank, 3.1 and 3.2 (Ulrich et al., J.
 * Biomol. NMR 73 (2019) 5), from memory. The molecules are invented.
 *
 * Contents: chains - distances - trees - torsions - other lists - refusals
 */
#include "given_text.h"

#include <math.h>
#include <string.h>

#define ASSEMBLY                                                                                                            \
    "data_invented\nsave_assembly\n_Assembly.ID 1\nloop_ _Entity_assembly.ID _Entity_assembly.Entity_ID "                   \
    "_Entity_assembly.Asym_ID 1 1 A 2 1 B stop_\nsave_\n"                                                                   \
    "save_peptide\n_Entity.ID 1\n_Entity.Type polymer\n_Entity.Polymer_type polypeptide(L)\n"                               \
    "loop_ _Entity_comp_index.ID _Entity_comp_index.Auth_seq_ID _Entity_comp_index.Comp_ID 1 11 GLY 2 12 SER 3 13 VAL stop_\nsave_\n"

/* One pair of addresses in the columns most files have: ID, logic, chain, index, residue, atom, twice; lower, upper. */
#define DISTANCES(rows)                                                                                                     \
    "save_noe\n_Gen_dist_constraint_list.ID 1\nloop_\n_Gen_dist_constraint.ID\n_Gen_dist_constraint.Member_logic_code\n"    \
    "_Gen_dist_constraint.Entity_assembly_ID_1\n_Gen_dist_constraint.Comp_index_ID_1\n_Gen_dist_constraint.Comp_ID_1\n"     \
    "_Gen_dist_constraint.Atom_ID_1\n_Gen_dist_constraint.Entity_assembly_ID_2\n_Gen_dist_constraint.Comp_index_ID_2\n"     \
    "_Gen_dist_constraint.Comp_ID_2\n_Gen_dist_constraint.Atom_ID_2\n_Gen_dist_constraint.Distance_lower_bound_val\n"       \
    "_Gen_dist_constraint.Distance_upper_bound_val\n" rows "stop_\nsave_\n"

/* ---- chains ---- */

Test(chains, each_assembly_is_a_chain_of_its_entity) {
    tml_problem *p = read_good(ASSEMBLY);
    const tml_molecule *m = &p->molecule;
    cr_assert(m->chain_count == 2 && m->residue_count == 6);
    cr_assert_str_eq(m->chains[0].code, "A");
    cr_assert_str_eq(m->chains[1].code, "B");
    cr_assert_str_eq(m->residues[tml_molecule_find_residue(m, "B", "2")].name, "SER");
    tml_problem_free(p);
}

Test(chains, two_molecules_of_one_name_are_told_apart) {
    tml_problem *p = read_good("data_x\nsave_a\nloop_ _Entity_assembly.ID _Entity_assembly.Entity_ID _Entity_assembly.Asym_ID 1 1 A 2 1 A stop_\n"
                               "save_\nsave_e\n_Entity.ID 1\nloop_ _Entity_comp_index.ID _Entity_comp_index.Comp_ID 1 GLY 2 GLY stop_\nsave_\n");
    cr_assert_eq(p->molecule.chain_count, 2);
    cr_assert(has_note(p, "two molecules are called A"));
    tml_problem_free(p);
}

Test(chains, a_table_of_one_row_may_be_written_as_items) {
    tml_problem *p = read_good("data_x\nsave_a\n_Entity_assembly.ID 1\n_Entity_assembly.Entity_ID 1\n_Entity_assembly.Asym_ID Q\nsave_\n"
                               "save_e\n_Entity.ID 1\nloop_ _Entity_poly_seq.Comp_index_ID _Entity_poly_seq.Mon_ID 1 GLY 2 ALA stop_\nsave_\n");
    cr_assert_geq(tml_molecule_find_residue(&p->molecule, "Q", "2"), 0);
    tml_problem_free(p);
}

Test(chains, residues_listed_with_their_chains_bring_variants_and_links) {
    tml_problem *p = read_good("data_x\nsave_a\nloop_ _Chem_comp_assembly.Entity_assembly_ID _Chem_comp_assembly.Comp_index_ID "
                               "_Chem_comp_assembly.Comp_ID _Chem_comp_assembly.Auth_asym_ID _Chem_comp_assembly.Sequence_linking "
                               "_Chem_comp_assembly.Auth_variant_ID 1 1 GLY A start . 1 2 CYS A middle . 1 3 ASP A middle +HD2 1 4 CYS A end . stop_\n"
                               "loop_ _Bond.Entity_assembly_ID_1 _Bond.Comp_index_ID_1 _Bond.Comp_ID_1 _Bond.Atom_ID_1 "
                               "_Bond.Entity_assembly_ID_2 _Bond.Comp_index_ID_2 _Bond.Comp_ID_2 _Bond.Atom_ID_2 "
                               "1 2 CYS SG 1 4 CYS SG 1 1 GLY C 1 2 CYS N stop_\nsave_\n");
    const tml_molecule *m = &p->molecule;
    cr_assert_geq(tml_molecule_find_atom(m, 2, "HD2"), 0);
    int32_t sg = tml_molecule_find_atom(m, 1, "SG"), other = tml_molecule_find_atom(m, 3, "SG");
    bool bonded = false;
    for (int32_t k = m->neighbour_first[sg]; k < m->neighbour_first[sg + 1]; k++) bonded = bonded || m->neighbours[k] == other;
    cr_assert(bonded);
    tml_problem_free(p);
}

/* ---- distances ---- */

Test(distances, or_rows_of_one_id_are_alternatives) {
    tml_problem *p = read_good(ASSEMBLY DISTANCES("1 OR 1 1 GLY HA2 1 3 VAL H 1.8 5\n1 OR 1 1 GLY HA3 1 3 VAL H 1.8 5\n"
                                                  "2 . 2 2 SER H 1 3 VAL MG1 1.8 .\n"));
    cr_assert_eq(p->restraints.distance_count, 2);
    const tml_distance_restraint *first = distance_by_id(p, "1"), *second = distance_by_id(p, "2");
    cr_assert(first->alternative_count == 2 && !first->combined && first->upper == 5);
    cr_assert(second->pair_count == 3 && second->range == TML_RANGE_INTER_CHAIN && isinf(second->upper));
    cr_assert_str_eq(first->list, "noe");
    tml_problem_free(p);
}

Test(distances, and_rows_hold_together) {
    tml_problem *p = read_good(ASSEMBLY DISTANCES("1 AND 1 1 GLY HA2 1 3 VAL H 1.8 5\n1 AND 1 1 GLY HA3 1 2 SER H 1.8 5\n"));
    const tml_distance_restraint *d = distance_by_id(p, "1");
    cr_assert(d->combined && d->alternative_count == 2);
    cr_assert_eq(p->restraints.alternatives[0].combination, p->restraints.alternatives[1].combination);
    tml_problem_free(p);
}

Test(distances, the_authors_numbers_do_where_there_are_no_others) {
    tml_problem *p = read_good(ASSEMBLY "save_noe\nloop_ _Gen_dist_constraint.ID _Gen_dist_constraint.Auth_asym_ID_1 "
                               "_Gen_dist_constraint.Auth_seq_ID_1 _Gen_dist_constraint.Auth_atom_ID_1 _Gen_dist_constraint.Auth_asym_ID_2 "
                               "_Gen_dist_constraint.Auth_seq_ID_2 _Gen_dist_constraint.Auth_atom_ID_2 "
                               "_Gen_dist_constraint.Distance_upper_bound_val 7 B 12 H B 13 HA 4 stop_\nsave_\n");
    cr_assert_eq(p->restraints.distance_count, 1, "%s", p->restraints.unmapped_count > 0 ? p->restraints.unmapped[0].reason : "");
    const tml_alternative *a = &p->restraints.alternatives[0];
    cr_assert_eq(p->restraints.group_atoms[a->first_a], atom_at(p, "B", "2", "H"));
    cr_assert_eq(p->restraints.group_atoms[a->first_b], atom_at(p, "B", "3", "HA"));
    cr_assert(has_note(p, "2 atoms are given by the author's residue numbers"));
    tml_problem_free(p);
}

Test(distances, a_target_and_its_error_stand_in_for_limits) {
    tml_problem *p = read_good(ASSEMBLY "save_noe\nloop_ _Gen_dist_constraint.ID _Gen_dist_constraint.Entity_assembly_ID_1 "
                               "_Gen_dist_constraint.Comp_index_ID_1 _Gen_dist_constraint.Atom_ID_1 _Gen_dist_constraint.Entity_assembly_ID_2 "
                               "_Gen_dist_constraint.Comp_index_ID_2 _Gen_dist_constraint.Atom_ID_2 _Gen_dist_constraint.Distance_val "
                               "_Gen_dist_constraint.Distance_val_err 7 1 1 HA2 1 3 H 4 0.5 stop_\nsave_\n");
    cr_assert(p->restraints.distances[0].lower == 3.5 && p->restraints.distances[0].upper == 4.5);
    tml_problem_free(p);
}

Test(distances, restraints_alone_go_with_another_inputs_only_chain) {
    static const char RESTRAINTS[] = "data_r\n" DISTANCES("1 . . 1 GLY HA2 . 3 VAL H 1.8 5\n");
    const char *const texts[TEXTS_MOST] = {"sheet 1\nsequence A 1 GLY SER VAL\n", RESTRAINTS};
    tml_problem *p = NULL;
    tml_error error = {0};
    cr_assert_eq(problem_read_texts(texts, &p, &error), TML_OK, "%s", error.message);
    cr_assert_eq(p->restraints.distance_count, 1, "%s", p->restraints.unmapped_count > 0 ? p->restraints.unmapped[0].reason : "");
    tml_problem_free(p);
}

/* ---- trees ---- */

#define TREE(nodes, members, values)                                                                                          \
    "save_old\nloop_ _Dist_constraint_tree.Constraint_ID _Dist_constraint_tree.Node_ID _Dist_constraint_tree.Down_node_ID "   \
    "_Dist_constraint_tree.Right_node_ID _Dist_constraint_tree.Logic_operation " nodes " stop_\n"                             \
    "loop_ _Dist_constraint.Tree_node_member_constraint_ID _Dist_constraint.Tree_node_member_node_ID "                        \
    "_Dist_constraint.Constraint_tree_node_member_ID _Dist_constraint.Entity_assembly_ID _Dist_constraint.Comp_index_ID "     \
    "_Dist_constraint.Atom_ID " members " stop_\n"                                                                            \
    "loop_ _Dist_constraint_value.Constraint_ID _Dist_constraint_value.Tree_node_ID "                                         \
    "_Dist_constraint_value.Distance_lower_bound_val _Dist_constraint_value.Distance_upper_bound_val " values " stop_\nsave_\n"

Test(trees, a_single_node_is_one_distance) {
    tml_problem *p = read_good(ASSEMBLY TREE("1 1 . . .", "1 1 1 1 1 HA2 1 1 2 1 3 H", "1 1 1.8 4.2"));
    cr_assert_eq(p->restraints.distance_count, 1);
    cr_assert(p->restraints.distances[0].upper == 4.2 && p->restraints.distances[0].pair_count == 1);
    tml_problem_free(p);
}

Test(trees, or_makes_alternatives_and_a_side_may_hold_several_atoms) {
    tml_problem *p = read_good(ASSEMBLY TREE("1 1 2 . OR 1 2 . 3 . 1 3 . . . 2 1 . . .",
                                             "1 2 1 1 1 HA2 1 2 2 1 3 H 1 3 1 1 1 HA3 1 3 2 1 3 H 2 1 1 1 2 HB2 2 1 1 1 2 HB3 2 1 2 1 3 H",
                                             "1 1 1.8 5 2 1 1.8 6"));
    cr_assert_eq(p->restraints.distance_count, 2);
    cr_assert(distance_by_id(p, "1")->alternative_count == 2 && distance_by_id(p, "1")->upper == 5);
    cr_assert(distance_by_id(p, "2")->pair_count == 2 && distance_by_id(p, "2")->upper == 6);
    tml_problem_free(p);
}

Test(trees, and_over_leaves_holds_together_and_and_over_or_is_left_out) {
    tml_problem *p = read_good(ASSEMBLY TREE("1 1 2 . AND 1 2 . 3 . 1 3 . . . 2 1 2 . AND 2 2 3 . OR 2 3 . 4 . 2 4 . . .",
                                             "1 2 1 1 1 HA2 1 2 2 1 3 H 1 3 1 1 1 HA3 1 3 2 1 3 H 2 3 1 1 1 HA2 2 3 2 1 3 H",
                                             "1 1 1.8 5 2 1 1.8 5"));
    cr_assert_eq(p->restraints.distance_count, 1);
    cr_assert(distance_by_id(p, "1")->combined);
    cr_assert(has_note(p, "restraint 2 combines alternatives by AND"));
    tml_problem_free(p);
}

Test(trees, nodes_in_a_circle_end) {
    tml_problem *p = read_good(ASSEMBLY TREE("1 1 2 . OR 1 2 1 2 OR", "1 2 1 1 1 HA2", "1 1 1.8 5"));
    cr_assert_eq(p->restraints.distance_count, 0);
    cr_assert(has_note(p, "trees of restraints: 2 nodes"));
    tml_problem_free(p);
}

Test(trees, may_stand_in_any_order_and_what_hangs_loose_is_told) {
    tml_problem *p = read_good(ASSEMBLY TREE("1 3 . . . 1 2 . 3 . 1 1 2 . OR 1 4 . . .",
                                             "1 2 1 1 1 HA2 1 2 2 1 3 H 1 3 1 1 1 HA3 1 3 2 1 3 H 1 9 1 1 1 HA2", "1 1 1.8 5 1 2 1.8 6"));
    cr_assert_eq(p->restraints.distance_count, 1);
    cr_assert(distance_by_id(p, "1")->alternative_count == 2 && distance_by_id(p, "1")->upper == 5);
    cr_assert(has_note(p, "1 nodes hang on no other"));
    cr_assert(has_note(p, "1 rows of members or values"));
    cr_assert(has_note(p, "1 nodes have limits other"));
    tml_problem_free(p);
}

Test(trees, a_leaf_of_three_members_is_left_out) {
    tml_problem *p = read_good(ASSEMBLY TREE("1 1 . . .", "1 1 1 1 1 HA2 1 1 2 1 3 H 1 1 3 1 2 H", "1 1 1.8 4.2"));
    cr_assert_eq(p->restraints.distance_count, 0);
    cr_assert(has_note(p, "1 leaves have not two members"));
    tml_problem_free(p);
}

/* ---- torsions ---- */

Test(torsions, intervals_run_upwards) {
    tml_problem *p = read_good(
        ASSEMBLY "save_t\nloop_\n_Torsion_angle_constraint.ID\n_Torsion_angle_constraint.Entity_assembly_ID_1\n"
                 "_Torsion_angle_constraint.Comp_index_ID_1\n_Torsion_angle_constraint.Atom_ID_1\n_Torsion_angle_constraint.Entity_assembly_ID_2\n"
                 "_Torsion_angle_constraint.Comp_index_ID_2\n_Torsion_angle_constraint.Atom_ID_2\n_Torsion_angle_constraint.Entity_assembly_ID_3\n"
                 "_Torsion_angle_constraint.Comp_index_ID_3\n_Torsion_angle_constraint.Atom_ID_3\n_Torsion_angle_constraint.Entity_assembly_ID_4\n"
                 "_Torsion_angle_constraint.Comp_index_ID_4\n_Torsion_angle_constraint.Atom_ID_4\n_Torsion_angle_constraint.Angle_lower_bound_val\n"
                 "_Torsion_angle_constraint.Angle_upper_bound_val\n1 1 1 C 1 2 N 1 2 CA 1 2 C 170 -170\n2 1 1 N 1 1 CA 1 1 C 1 2 N -184 -63\nstop_\nsave_\n");
    const double degree = 3.14159265358979323846 / 180;
    cr_assert_eq(p->restraints.dihedral_count, 2);
    cr_assert_float_eq(p->restraints.intervals[0].upper - p->restraints.intervals[0].lower, 20 * degree, 1e-9);
    cr_assert_float_eq(p->restraints.intervals[1].upper - p->restraints.intervals[1].lower, 121 * degree, 1e-9);
    tml_problem_free(p);
}

/* ---- other lists ---- */

Test(other_lists, are_counted_and_named_and_housekeeping_is_not) {
    tml_problem *p = read_good(ASSEMBLY "save_rdc\nloop_ _RDC_constraint.ID _RDC_constraint.RDC_val 1 3.5 2 -8 stop_\n"
                                        "loop_ _RDC_constraint_software.ID _RDC_constraint_software.Entry_ID 1 x stop_\nsave_\n");
    cr_assert(has_note(p, "2 residual dipolar couplings are not used"));
    cr_assert_eq(p->note_count, 1);
    tml_problem_free(p);
}

/* ---- refusals ---- */

Test(refusals, what_cannot_be_read_is_shown_where_it_stands) {
    read_bad(ASSEMBLY DISTANCES("1 XOR 1 1 GLY HA2 1 3 VAL H 1.8 5\n"), 0, "found 'XOR' where OR or AND is expected");
    read_bad(ASSEMBLY DISTANCES(". OR 1 1 GLY HA2 1 3 VAL H 1.8 5\n"), 0, "a restraint's ID");
    read_bad(ASSEMBLY DISTANCES("1 OR 1 1 GLY HA2 1 3 VAL H far 5\n"), 0, "a number");
    read_bad("data_x\nsave_d\nloop_ _Gen_dist_constraint.ID 1 stop_\nsave_\n", 0, "no column Atom_ID_1");
}

/* A model's mmCIF has categories of the same names, but no save frames. */
Test(refusals, a_models_mmcif_is_no_nmr_star) {
    read_bad("data_x\nloop_ _entity_poly_seq.entity_id _entity_poly_seq.num _entity_poly_seq.mon_id 1 1 GLY\n", 1, "without sequence");
}

/* The archive's file may give a row another residue than its author did, as where both number from one but mean different starts. */
Test(distances, indices_that_are_not_the_authors_numbers_are_doubted) {
    tml_problem *p = read_good("data_x\nsave_a\nloop_ _Entity_assembly.ID _Entity_assembly.Entity_ID _Entity_assembly.Asym_ID 1 1 A stop_\nsave_\n"
                               "save_e\n_Entity.ID 1\nloop_ _Entity_comp_index.ID _Entity_comp_index.Comp_ID 1 GLY 2 SER 3 VAL 4 GLY stop_\nsave_\n"
                               "save_noe\nloop_ _Gen_dist_constraint.ID _Gen_dist_constraint.Comp_index_ID_1 _Gen_dist_constraint.Atom_ID_1 "
                               "_Gen_dist_constraint.Auth_seq_ID_1 _Gen_dist_constraint.Comp_index_ID_2 _Gen_dist_constraint.Atom_ID_2 "
                               "_Gen_dist_constraint.Auth_seq_ID_2 _Gen_dist_constraint.Distance_upper_bound_val "
                               "1 3 H 1 4 H 2 5 stop_\nsave_\n");
    cr_assert_eq(p->restraints.distance_count, 1);
    cr_assert(has_note(p, "2 atoms have another residue index than the author's number (+2"));
    tml_problem_free(p);
}
